"""How the command ends: exit statuses, and every error as a line that a person can act on."""

import io
import os
import sys
import tempfile
import time
import traceback
from collections.abc import Callable
from pathlib import Path

from plumbrule_core.errors import CasebookError, PlumbruleError, Refused, Unreadable

ANSWERED, WRONG_INPUT, FAILED, STOPPED, TOO_LARGE = 0, 2, 3, 4, 5


def say(text: str) -> None:
    """A line on standard error."""
    sys.stderr.write(text + "\n")
    sys.stderr.flush()


def readable_streams() -> None:
    """A terminal that cannot show a sign shows a stand-in, in place of an error."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="replace")


def print_out(text: str) -> None:
    """Text on standard output, at once, so that a closed pipe is noticed here."""
    sys.stdout.write(text + "\n")
    sys.stdout.flush()


def guarded(work: Callable[[], int]) -> int:
    """The exit status of some work; whatever it raises becomes a line and a status."""
    try:
        return work()
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else WRONG_INPUT
    except KeyboardInterrupt:
        say("plumbrule: stopped")
        return STOPPED
    except Refused as refused:
        for fault in refused.faults:
            say(str(fault))
        return WRONG_INPUT
    except (Unreadable, CasebookError) as error:
        say(f"plumbrule: {error}")
        return WRONG_INPUT
    except PlumbruleError as error:
        say(f"plumbrule: {error}")
        return FAILED
    except BrokenPipeError:
        # Whoever read the output has closed it, as `head` does: nothing more can be said there.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return ANSWERED
    except Exception as error:
        say(f"plumbrule: an error of the program itself, not of your input: {_kind(error)}; {_logged()}")
        return FAILED


def _kind(error: Exception) -> str:
    return f"{type(error).__name__}: {error}".splitlines()[0][:200]


def _logged() -> str:
    """Where the whole story of the current exception was written, for a report to the authors."""
    from plumbrule_core.engine import cache_folder

    name = f"plumbrule-error-{time.strftime('%Y%m%d-%H%M%S')}.log"
    for folder in (cache_folder, lambda: Path(tempfile.gettempdir())):
        try:
            path = folder() / name
            path.write_text(traceback.format_exc(), encoding="utf-8")
        except OSError:
            continue
        return f"the details are in {path}"
    return "no log could be written"
