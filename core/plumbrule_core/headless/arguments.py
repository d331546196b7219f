"""The words of the command line."""

import argparse
import math
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

from plumbrule_core import __version__
from plumbrule_core.headless import doctor, forecast, report, run, show

Command = Callable[[argparse.Namespace], int]

COMMANDS: Mapping[str, Command] = {
    "run": run.command,
    "forecast": forecast.command,
    "show": show.command,
    "report": report.command,
    "doctor": doctor.command,
}

ENDING = """\
exit status: 0 answered, whatever the verdict; 2 the input is wrong; 3 a calculation failed; 4 stopped;
5 the forecast exceeds memory or disk and --yes was not given"""


def parsed(words: Sequence[str]) -> argparse.Namespace:
    """The arguments; raises SystemExit as argparse does, with status 2 where they are wrong."""
    return _parser().parse_args(list(words))


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="plumbrule",
        description="Without a command the window opens: plumbrule [FILE.plumb | --demo].",
        epilog=ENDING,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"plumbrule {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    _add_run(commands.add_parser("run", help="compute what a question file asks", allow_abbrev=False))
    _add_question(
        commands.add_parser("forecast", help="what it would take; computes nothing", allow_abbrev=False)
    )
    _add_casebook(commands.add_parser("show", help="what a casebook holds", allow_abbrev=False))
    _add_report(commands.add_parser("report", help="write a report or another format", allow_abbrev=False))
    _add_json(commands.add_parser("doctor", help="see whether everything works here", allow_abbrev=False))
    return parser


def _add_run(parser: argparse.ArgumentParser) -> None:
    _add_question(parser)
    parser.add_argument("--casebook", type=Path, metavar="FILE.plumb", help="keep question and results here")
    parser.add_argument("--threads", type=_whole, metavar="N", help="threads to compute with")
    parser.add_argument("--memory", type=_positive, metavar="GB", help="memory that may be used")
    parser.add_argument("--yes", action="store_true", help="run even where the forecast exceeds the machine")


def _add_question(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("question", type=Path, metavar="QUESTION.toml")
    _add_json(parser)


def _add_casebook(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("casebook", type=Path, metavar="FILE.plumb")
    _add_json(parser)


def _add_report(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("casebook", type=Path, metavar="FILE.plumb")
    parser.add_argument(
        "-o", "--output", type=Path, required=True, metavar="OUT", help="its ending names the format"
    )
    parser.add_argument("--question", type=_whole, default=None, metavar="N", help="which question")


def _add_json(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--json", type=Path, metavar="OUT.json", help="write the outcome for machines too")


def _whole(text: str) -> int:
    number = int(text) if text.isdecimal() and len(text) < 10 else 0
    if number < 1:
        raise argparse.ArgumentTypeError(f"'{text}' must be a whole number, 1 or more")
    return number


def _positive(text: str) -> float:
    try:
        number = float(text)
    except ValueError:
        number = math.nan
    if not (math.isfinite(number) and number > 0):
        raise argparse.ArgumentTypeError(f"'{text}' must be a number of GB above 0")
    return number
