"""What a report of this answer must cite: methods, extrapolation and the diagnostics that were used."""

import re
from collections.abc import Iterable, Sequence

from plumbrule_core.documents.findings import Finding
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.extrapolation import CORRELATION_SOURCE, HF_SOURCE
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.rungs import RUNGS

_YEAR = re.compile(r"\(\d{4}\)$")
DIAGNOSTICS = {
    "T1": ("t1_closed", "t1_open"),
    "D1": ("d1",),
    "D2": ("d2",),
    "M": ("m_large",),
}
"""Readings whose published limits were looked at, with the names of the limits."""


def citations(case: Case, values: Sequence[LadderValue], findings: Sequence[Finding]) -> tuple[str, ...]:
    """Every source once: the rungs in their order, the extrapolation, the diagnostics, the findings."""
    rungs = [RUNGS[rung].citation for rung in case.rungs if _computed(case, rung)]
    limits = [HF_SOURCE, CORRELATION_SOURCE] if any(value.extrapolated for value in values) else []
    return tuple(dict.fromkeys([*rungs, *limits, *_diagnostics(case), *_published(findings)]))


def _computed(case: Case, rung: str) -> bool:
    return any(key[0] == rung for view in case.views for key in view.results)


def _diagnostics(case: Case) -> Iterable[str]:
    taken = {name for view in case.views for name in view.readings}
    closed = any(view.closed_shell for view in case.views)
    open_shell = any(not view.closed_shell for view in case.views)
    for reading, limits in DIAGNOSTICS.items():
        for limit in limits if reading in taken else ():
            if (limit != "t1_open" or open_shell) and (limit != "t1_closed" or closed):
                yield THRESHOLDS[limit].source
    if any(case.tae_triples(view) is not None for view in case.views):
        yield THRESHOLDS["tae_severe"].source


def _published(findings: Sequence[Finding]) -> Iterable[str]:
    """Sources that end with a year in brackets are publications; the others are our own or rules of thumb."""
    for finding in findings:
        for evidence in finding.evidence:
            if _YEAR.search(evidence.source):
                yield evidence.source
