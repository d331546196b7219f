"""Geometry: what can be seen before anything is computed."""

from plumbrule_core.documents.bonding import unbonded_pieces
from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.geometry_origin import origin_of
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice

RULES: tuple[Rule, ...] = ()
