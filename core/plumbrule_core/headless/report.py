"""`plumbrule report`: one question of a casebook as a file for people or for other programs."""

import argparse

from plumbrule_core.headless.asked import check_output, existing_casebook, refused
from plumbrule_core.headless.endings import ANSWERED, say
from plumbrule_core.session import Session


def command(arguments: argparse.Namespace) -> int:
    """Write the file; its ending names the format."""
    suffixes = Session.export_suffixes()
    check_output(arguments.output, "--output")
    if arguments.output.suffix.lower() not in suffixes:
        raise refused("--output", _unknown(arguments.output.suffix, tuple(suffixes)))
    session = existing_casebook(arguments.casebook)
    try:
        entries = session.briefs()
        place = arguments.question or 1
        if place > len(entries):
            has = f"{len(entries)} questions" if len(entries) != 1 else "1 question"
            raise refused("--question", f"the casebook has {has}, so there is no number {place}")
        if len(entries) > 1 and arguments.question is None:
            say(f"the casebook has {len(entries)} questions; this is the first, --question N takes another")
        session.export(entries[place - 1].id, arguments.output)
    finally:
        session.close()
    say(f"{arguments.output} is written")
    return ANSWERED


def _unknown(suffix: str, known: tuple[str, ...]) -> str:
    if suffix.lower() == ".h5":
        return f"TREXIO (.h5) is not built yet in this version; use one of {', '.join(known)}"
    return f"'{suffix}' names no format; use one of {', '.join(known)}"
