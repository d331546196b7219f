"""The command `plumbrule`: without a command word the window, with one the same core without a screen."""

import sys
from collections.abc import Sequence

from plumbrule_core.headless.arguments import COMMANDS, parsed
from plumbrule_core.headless.endings import FAILED, guarded, readable_streams, say


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command and return its exit status; no error leaves this function but as a line for people."""
    words = tuple(sys.argv[1:] if argv is None else argv)
    readable_streams()
    return guarded(lambda: _window(words) if _wants_window(words) else _command(words))


def _wants_window(words: Sequence[str]) -> bool:
    """No words at all, `--demo`, or the path of one casebook."""
    return not words or words[0] == "--demo" or (len(words) == 1 and words[0].lower().endswith(".plumb"))


def _window(words: Sequence[str]) -> int:
    try:
        from plumbrule_desktop.app import main as open_window
    except ModuleNotFoundError as missing:
        if (missing.name or "").partition(".")[0] not in ("PySide6", "plumbrule_desktop"):
            raise
        say(
            "plumbrule: the window is not installed; `pip install 'plumbrule[desktop]'` adds it, and "
            "`plumbrule --help` lists what works without it"
        )
        return FAILED
    return open_window(list(words))


def _command(words: Sequence[str]) -> int:
    arguments = parsed(words)
    return COMMANDS[arguments.command](arguments)
