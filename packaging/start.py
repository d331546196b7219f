"""Set Plumbrule up where it stands and start it: `python3 packaging/start.py [--headless]`.

Makes `.venv`, installs the locked packages, looks for the system libraries that the window needs, then opens
the window with the demo questions. Without a screen, or with `--headless`, it answers a demo question in the
terminal instead.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
from typing import TYPE_CHECKING

from environment import LOCK, OFFSCREEN, ON_A_SCREEN, Environment, Problem, check_libraries, check_python, say

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

DEMO_FOLDER = "resources/plumbrule_resources/demo"


def main(arguments: Sequence[str]) -> int:
    """Set up and start; returns the exit status."""
    asked = _parser().parse_args(arguments)
    screen = not asked.headless and has_screen(os.environ, sys.platform)
    try:
        check_python()
        if screen:
            check_libraries(libraries_for(os.environ))
        environment = Environment()
        environment.prepare([LOCK])
        return _become(command(environment, screen))
    except Problem as problem:
        say(f"start.py: {problem}")
        return 1


def has_screen(variables: Mapping[str, str], platform: str) -> bool:
    """Whether a window can be shown; only Linux starts without a screen."""
    return not platform.startswith("linux") or any(
        variables.get(name) for name in ("DISPLAY", "WAYLAND_DISPLAY")
    )


def libraries_for(variables: Mapping[str, str]) -> dict[str, str]:
    """The system libraries that the window needs on this screen, with their packages."""
    return {**OFFSCREEN, **(ON_A_SCREEN if variables.get("DISPLAY") else {})}


def command(environment: Environment, screen: bool) -> list[str]:
    """What to run: the window on the demo, or one demo question in the terminal."""
    program = environment.program("plumbrule")
    if screen:
        return [program, "--demo"]
    questions = sorted((environment.root / DEMO_FOLDER).glob("*.toml"))
    if not questions:
        raise Problem(f"There is no demo question in {DEMO_FOLDER}; is this copy complete?")
    say(f"No window: answering the demo question {questions[0].name} in the terminal.")
    return [program, "run", str(questions[0])]


def _become(words: list[str]) -> int:
    """Hand over to the program, so that it gets the signals itself; Windows has no such thing."""
    if os.name != "nt":
        os.execv(words[0], words)
    return subprocess.run(words, check=False).returncode


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="start.py", description="Set Plumbrule up and start it.")
    parser.add_argument(
        "--headless", action="store_true", help="answer a demo question in the terminal instead"
    )
    return parser


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
