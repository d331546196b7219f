"""The rungs of the ladder; `RUNGS` is the one list."""

from collections.abc import Mapping
from types import MappingProxyType

from plumbrule_core.rungs.active_space import ActiveSpace
from plumbrule_core.rungs.casci import CASCI
from plumbrule_core.rungs.casscf import CASSCF
from plumbrule_core.rungs.ccsd import CCSD
from plumbrule_core.rungs.ccsd_t import PerturbativeTriples
from plumbrule_core.rungs.ccsdt_full import CCSDT
from plumbrule_core.rungs.ccsdt_q import PerturbativeQuadruples
from plumbrule_core.rungs.cisd import CISD
from plumbrule_core.rungs.density_functionals import B3LYP, M06_2X, PBE
from plumbrule_core.rungs.dmrg_rung import DMRG
from plumbrule_core.rungs.fci import FCI
from plumbrule_core.rungs.hartree_fock import HartreeFock
from plumbrule_core.rungs.mp2 import MP2
from plumbrule_core.rungs.nevpt2 import NEVPT2
from plumbrule_core.rungs.protocol import Rung
from plumbrule_core.rungs.tccsd import TCCSD
from plumbrule_core.rungs.tccsd_t import TCCSDT

_ALL: tuple[Rung, ...] = (
    HartreeFock(),
    MP2(),
    CISD(),
    CCSD(),
    PerturbativeTriples(),
    CCSDT(),
    PerturbativeQuadruples(),
    FCI(),
    ActiveSpace(),
    CASCI(),
    DMRG(),
    CASSCF(),
    NEVPT2(),
    TCCSD(),
    TCCSDT(),
    PBE,
    B3LYP,
    M06_2X,
)

RUNGS: Mapping[str, Rung] = MappingProxyType({rung.name: rung for rung in _ALL})
"""Every method by its name."""

SPACE = ActiveSpace.name
"""The rung that finds the active space; it comes by need."""


def stands_on_space(rung: str) -> bool:
    """Whether a rung works in an active space, or finds it."""
    return rung == SPACE or SPACE in RUNGS[rung].needs
