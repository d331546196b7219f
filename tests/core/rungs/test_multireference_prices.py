"""What an active space is forecast to cost: counted where it is set, guessed where it is proposed."""

import pytest

from plumbrule_core.documents.plan import Machine
from plumbrule_core.rungs.active.counts import determinants, in_words
from plumbrule_core.rungs.casci import CASCI
from plumbrule_core.rungs.casscf import CASSCF
from plumbrule_core.rungs.dmrg_rung import DMRG
from plumbrule_core.rungs.fci import FCI
from plumbrule_core.rungs.nevpt2 import NEVPT2
from plumbrule_core.rungs.protocol import Size

LAPTOP = Machine(cores=1, memory_mb=8000, disk_mb=50000, seconds_per_gigaflop=0.03)
RUNGS = (CASCI(), CASSCF(), NEVPT2(), DMRG())


def size(active=None, functions=60):
    return Size(atoms=2, functions=functions, occupied=5, virtual=functions - 7, frozen=2, active=active)


def test_determinants_are_counted_as_the_textbooks_do():
    # Every choice of the filled orbitals of either spin; 1.0 million for water in a double zeta basis is the
    # project's note on check value F07, and 4.5e8 for water/cc-pVDZ that on F01, both with symmetry used.
    assert determinants(14, 5, 5) == 2002**2
    assert determinants(6, 3, 3) == 400
    assert determinants(12, 4, 3) == 108_900


@pytest.mark.parametrize(
    ("count", "words"),
    [
        (400, "400"),
        (108_900, "109 thousand"),
        (4.5e8, "450 million"),
        (10**21, "about 10 to the power of 21"),
    ],
)
def test_a_count_is_said_in_words(count, words):
    assert in_words(count) == words


@pytest.mark.parametrize("rung", RUNGS, ids=lambda rung: rung.name)
def test_a_larger_space_costs_more_and_a_proposed_one_is_a_guess(rung):
    small, large = (rung.forecast(size(active), LAPTOP) for active in ((6, 3, 3), (14, 7, 7)))
    guessed = rung.forecast(size(), LAPTOP)
    assert small.seconds < large.seconds
    assert small.memory_mb < large.memory_mb
    assert (small.sure, guessed.sure) == ("counted", "a guess")
    assert guessed.seconds_high / guessed.seconds_low > small.seconds_high / small.seconds_low


def test_a_space_of_six_orbitals_takes_seconds_and_one_of_sixteen_does_not_fit():
    assert CASCI().forecast(size((6, 3, 3)), LAPTOP).seconds < 10
    assert CASCI().forecast(size((16, 8, 8)), LAPTOP).memory_mb > LAPTOP.memory_mb


def test_full_ci_of_anything_but_the_smallest_molecules_exceeds_every_machine():
    tiny = FCI().forecast(Size(atoms=2, functions=13, occupied=4, virtual=8, frozen=1), LAPTOP)
    water = FCI().forecast(Size(atoms=3, functions=24, occupied=5, virtual=19), LAPTOP)
    huge = FCI().forecast(Size(atoms=60, functions=840, occupied=120, virtual=660, frozen=60), LAPTOP)
    assert tiny.seconds < 60
    assert tiny.sure == "counted"
    assert water.memory_mb > LAPTOP.memory_mb
    assert huge.memory_mb > 1e30
    assert huge.seconds < float("inf")
