"""Check this copy of Plumbrule: `python3 packaging/check.py [--fast | --all] [more for pytest]`.

The same environment as `start.py` plus the test tools; then layout, style, types, imports and tests. Every
stage runs, whatever the ones before found. The tests come last, so that their closing line is the last line.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
from typing import TYPE_CHECKING

from environment import LOCK, LOCK_TEST, OFFSCREEN, Environment, Problem, check_libraries, check_python, say

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

STAGES: Mapping[str, Sequence[str]] = {
    "layout": ("ruff", "format", "--check"),
    "style": ("ruff", "check"),
    "types": ("mypy",),
    "imports": ("lint-imports",),
}
SELECTED: Mapping[str, Sequence[str]] = {
    "fast": ("-m", "not slow and not window"),
    "usual": ("-m", "not slow"),
    "all": (),
}
"""Which tests each choice runs, in pytest's words."""
CALM = {
    "OMP_NUM_THREADS": "1",
    "OMP_WAIT_POLICY": "PASSIVE",
    "QT_QPA_PLATFORM": "offscreen",
    "MYPYPATH": os.pathsep.join(("core", "desktop", "resources")),
}
"""Tests need no screen, and waiting threads must not burn cores; what is set outside holds."""


def main(arguments: Sequence[str]) -> int:
    """Check everything; returns 0 only where every stage passed, else the tests' own status or 1."""
    asked, for_pytest = _parser().parse_known_args(arguments)
    try:
        check_python()
        check_libraries(OFFSCREEN)
        environment = Environment()
        environment.prepare([LOCK, LOCK_TEST])
    except Problem as problem:
        say(f"check.py: {problem}")
        return 1
    failed = [name for name, words in STAGES.items() if _stage(environment, name, words) != 0]
    say(f"== before the tests: {'failed: ' + ', '.join(failed) if failed else 'all passed'}")
    tests = _stage(environment, "tests", ["pytest", *SELECTED[asked.choice], *for_pytest])
    return tests or (1 if failed else 0)


def _stage(environment: Environment, name: str, words: Sequence[str]) -> int:
    say(f"== {name}: {' '.join(words)}")
    program = [environment.program(words[0]), *words[1:]]
    return subprocess.run(program, check=False, cwd=environment.root, env={**CALM, **os.environ}).returncode


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="check.py", description="Check this copy of Plumbrule.")
    choice = parser.add_mutually_exclusive_group()
    leave_out = "leave out slow tests and those that open the real window"
    choice.add_argument("--fast", dest="choice", action="store_const", const="fast", help=leave_out)
    choice.add_argument("--all", dest="choice", action="store_const", const="all", help="run every test")
    parser.set_defaults(choice="usual")
    return parser


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
