"""The rungs of the ladder; `RUNGS` is the one list."""

from collections.abc import Mapping
from types import MappingProxyType

from plumbrule_core.rungs.ccsd import CCSD
from plumbrule_core.rungs.ccsd_t import PerturbativeTriples
from plumbrule_core.rungs.ccsdt_full import CCSDT
from plumbrule_core.rungs.ccsdt_q import PerturbativeQuadruples
from plumbrule_core.rungs.cisd import CISD
from plumbrule_core.rungs.density_functionals import B3LYP, M06_2X, PBE
from plumbrule_core.rungs.fci import FCI
from plumbrule_core.rungs.hartree_fock import HartreeFock
from plumbrule_core.rungs.mp2 import MP2
from plumbrule_core.rungs.protocol import Rung

_ALL: tuple[Rung, ...] = (
    HartreeFock(),
    MP2(),
    CISD(),
    CCSD(),
    PerturbativeTriples(),
    CCSDT(),
    PerturbativeQuadruples(),
    FCI(),
    PBE,
    B3LYP,
    M06_2X,
)

RUNGS: Mapping[str, Rung] = MappingProxyType({rung.name: rung for rung in _ALL})
"""Every method by its name."""
