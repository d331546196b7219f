"""`plumbrule show`: what a casebook holds."""

import argparse
from typing import Any

from plumbrule_core import __version__
from plumbrule_core.exports.facts import task_rows
from plumbrule_core.exports.record import Record
from plumbrule_core.exports.record_json import record_data
from plumbrule_core.headless.asked import check_output, existing_casebook, write_json
from plumbrule_core.headless.endings import ANSWERED, print_out, say
from plumbrule_core.headless.tables import outcome_text


def command(arguments: argparse.Namespace) -> int:
    """Print every question with its outcome; the JSON holds the first, and the others under `further`."""
    check_output(arguments.json, "--json")
    session = existing_casebook(arguments.casebook)
    try:
        for sentence in session.damaged:
            say(sentence)
        records = [session.record(entry.id) for entry in session.briefs()]
        texts = [_text(place, record) for place, record in enumerate(records, start=1)]
        write_json(arguments.json, casebook_data(records))
    finally:
        session.close()
    print_out("\n\n\n".join(texts) or "no question yet")
    return ANSWERED


def casebook_data(records: list[Record]) -> dict[str, Any]:
    """The layout of one question for the first, with the rest in the same layout under `further`."""
    if not records:
        return {"plumbrule": __version__}
    first, *rest = [record_data(record) for record in records]
    return first | ({"further": rest} if rest else {})


def _text(place: int, record: Record) -> str:
    rows = task_rows(record)
    done = sum(row.result is not None for row in rows)
    title = f" {record.brief.title}" if record.brief.title else ""
    faults = "".join(f"\n{fault}" for fault in record.plan.faults)
    return f"{place}.{title}\n{outcome_text(record)}\n\n{done} of {len(rows)} calculations done{faults}"
