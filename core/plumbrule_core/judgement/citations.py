"""What a report of this answer must cite: methods, extrapolation and the diagnostics that were used."""

import json
import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from plumbrule_core.basis_sets import Basis
from plumbrule_core.documents.findings import Finding
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.extrapolation import CORRELATION_SOURCE, HF_SOURCE
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.rungs import RUNGS
from plumbrule_resources import text

PAPERS: Mapping[str, Any] = json.loads(text("citations.json"))
"""The library that computes, and basis sets by family, some of them by element."""

_YEAR = re.compile(r"\(\d{4}\)$")
DIAGNOSTICS = {
    "T1": ("t1_closed", "t1_open"),
    "D1": ("d1",),
    "D2": ("d2",),
    "M": ("m_large",),
}
"""Readings whose published limits were looked at, with the names of the limits."""


def citations(case: Case, values: Sequence[LadderValue], findings: Sequence[Finding]) -> tuple[str, ...]:
    """Every source once: rungs, extrapolation, basis sets, diagnostics, findings, what computed."""
    rungs = [RUNGS[rung].citation for rung in case.rungs if _computed(case, rung)]
    limits = [HF_SOURCE, CORRELATION_SOURCE] if any(value.extrapolated for value in values) else []
    program = PAPERS["program"] if any(view.results for view in case.views) else []
    return tuple(
        dict.fromkeys(
            [*rungs, *limits, *_of_bases(case), *_diagnostics(case), *_published(findings), *program]
        )
    )


def _of_bases(case: Case) -> Iterable[str]:
    """The papers of the basis sets that something was computed in, for the elements that are there."""
    for view in case.views:
        used = {basis for _, basis in view.results}
        for basis in case.bases:
            if basis.name in used:
                yield from (PAPERS["papers"][key] for key in _of_basis(basis, view.species.counts))


def _of_basis(basis: Basis, symbols: Iterable[str]) -> Iterable[str]:
    row = PAPERS["families"].get(basis.family, {"papers": []})
    if row.get("consistent"):
        for block in PAPERS["consistent"]:
            if set(symbols) & set(block["elements"].split()):
                yield from block["papers"]
    yield from row["papers"]
    yield from row.get("polarised", ()) if basis.polarised else ()
    yield from row.get("diffuse", ()) if basis.diffuse else ()


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
