"""What the commands read: question files with all faults at once, casebooks that must exist."""

import json
from pathlib import Path
from typing import Any

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.plan import Machine, Plan
from plumbrule_core.engine import cache_folder, machine
from plumbrule_core.errors import Refused
from plumbrule_core.exports import save
from plumbrule_core.planning import make_plan, recipe_faults
from plumbrule_core.question_file import read_draft
from plumbrule_core.session import Session


def refused(where: str, says: str) -> Refused:
    """One fault, ready to be raised."""
    return Refused((Fault(where=where, says=says),))


def read_brief(path: Path) -> Brief:
    """The brief of a question file; raises Refused with every fault, the recipe's included."""
    draft = read_draft(path)
    if not draft.faults:
        return draft.brief()
    of_recipe = recipe_faults(draft.recipe, draft.species) if draft.recipe is not None else ()
    raise Refused((*draft.faults, *of_recipe))


def planned(path: Path) -> tuple[Brief, Plan, Machine]:
    """The brief, its plan and this machine; raises Refused with every fault."""
    brief = read_brief(path)
    here = machine(cache_folder())
    plan = make_plan(brief, here)
    if plan.faults:
        raise Refused(plan.faults)
    return brief, plan, here


def existing_casebook(path: Path) -> Session:
    """An open casebook; raises Refused where there is none, CasebookError where it is damaged."""
    if not path.is_file():
        raise refused(str(path), "there is no such casebook")
    return Session.open(path)


def check_output(path: Path | None, option: str) -> None:
    """Raise Refused where a file could not be written in the end, before anything is computed for it."""
    if path is None:
        return
    if path.is_dir():
        raise refused(option, f"'{path}' is a folder; name a file")
    if not path.absolute().parent.is_dir():
        raise refused(option, f"there is no folder '{path.absolute().parent}'")


def write_json(path: Path | None, data: dict[str, Any]) -> None:
    """Write beside and rename, where a path is given."""
    if path is not None:
        save(path, (json.dumps(data, allow_nan=False, indent=1) + "\n").encode())
