"""The record of one question: everything that an export may say about it."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Judgement
from plumbrule_core.documents.plan import Machine, Plan
from plumbrule_core.documents.results import ArrayRef, Result
from plumbrule_core.documents.run_state import RunState


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """One question with all that was planned, computed and judged; `results` maps task identities."""

    brief: Brief
    plan: Plan
    state: RunState
    results: Mapping[str, Result]
    judgement: Judgement
    machine: Machine
    versions: Mapping[str, str]
    array: Callable[[ArrayRef], np.ndarray]
    """Loads one array of a result from the casebook."""
