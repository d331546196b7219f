"""Where active orbitals sit among the correlated ones, what is put there, and which size is taken."""

import numpy as np
import pytest

from plumbrule_core.correlation.settling import settled, spread
from plumbrule_core.correlation.tailored import Seat, Seats, hold, seat

RANDOM = np.random.default_rng(11)
OCCUPIED, VIRTUAL = 4, 5


def turn(size: int) -> np.ndarray:
    """A random orthogonal matrix."""
    return np.linalg.qr(RANDOM.normal(size=(size, size)))[0]


def columns(size: int, chosen: list[int]) -> np.ndarray:
    return np.eye(size)[:, chosen]


def chosen(occupied: list[int], virtual: list[int]) -> Seat:
    return Seat(occupied=columns(OCCUPIED, occupied), virtual=columns(VIRTUAL, virtual))


def restricted_amplitudes() -> tuple[np.ndarray, np.ndarray]:
    doubles = RANDOM.normal(size=(OCCUPIED, OCCUPIED, VIRTUAL, VIRTUAL))
    return RANDOM.normal(size=(OCCUPIED, VIRTUAL)), doubles + doubles.transpose(1, 0, 3, 2)


def unrestricted_amplitudes():
    def antisymmetric(block):
        block = block - block.transpose(1, 0, 2, 3)
        return block - block.transpose(0, 1, 3, 2)

    shape = (OCCUPIED, OCCUPIED, VIRTUAL, VIRTUAL)
    same = [antisymmetric(RANDOM.normal(size=shape)) for _ in range(2)]
    singles = (RANDOM.normal(size=shape[1:3]), RANDOM.normal(size=shape[1:3]))
    return singles, (same[0], RANDOM.normal(size=shape), same[1])


def test_only_amplitudes_with_all_indices_active_are_changed():
    seats = Seats(alpha=chosen([2, 3], [0, 1]), beta=chosen([2, 3], [0, 1]))
    singles, doubles = restricted_amplitudes()
    before = singles.copy(), doubles.copy()
    target = np.full((2, 2), 7.0), np.full((2, 2, 2, 2), 9.0)
    seats.impose(singles, doubles, target)
    assert np.allclose(singles[2:, :2], 7)
    assert np.allclose(doubles[2:, 2:, :2, :2], 9)
    for now, old, active in (
        (singles, before[0], np.s_[2:, :2]),
        (doubles, before[1], np.s_[2:, 2:, :2, :2]),
    ):
        rest = np.ones(now.shape, dtype=bool)
        rest[active] = False
        assert np.array_equal(now[rest], old[rest])


def test_clearing_leaves_zero_there_and_nothing_else_changed():
    seats = Seats(alpha=chosen([3], [0, 1]), beta=chosen([2, 3], [0]))
    singles, doubles = unrestricted_amplitudes()
    kept = [block.copy() for block in (*singles, *doubles)]
    seats.clear(singles, doubles)
    assert np.all(singles[0][3, :2] == 0)
    assert np.all(singles[1][2:, 0] == 0)
    assert np.allclose(doubles[1][np.ix_([3], [2, 3], [0, 1], [0])], 0)
    assert np.allclose(doubles[2][np.ix_([2, 3], [2, 3], [0], [0])], 0)
    changed = [int((now != old).sum()) for now, old in zip((*singles, *doubles), kept, strict=True)]
    # Antisymmetric blocks of one active orbital were zero before.
    assert changed == [2, 2, 0, 4, 0]


@pytest.mark.parametrize("unrestricted", [False, True])
def test_turned_orbitals_are_the_same_as_turning_put_in_and_turning_back(unrestricted):
    """Putting amplitudes in among turned orbitals equals turning all, overwriting by number, turning back."""
    turns = [(turn(OCCUPIED), turn(VIRTUAL)) for _ in range(2)]
    if not unrestricted:
        turns[1] = turns[0]
    places = [([1, 3], [0, 2, 4]), ([0, 1] if unrestricted else [1, 3], [3] if unrestricted else [0, 2, 4])]
    plain = Seats(alpha=chosen(*places[0]), beta=chosen(*places[1]))
    turned = Seats(
        **{
            spin: Seat(occupied=o @ side.occupied, virtual=v @ side.virtual)
            for spin, (o, v), side in zip(("alpha", "beta"), turns, (plain.alpha, plain.beta), strict=True)
        }
    )
    singles, doubles = unrestricted_amplitudes() if unrestricted else restricted_amplitudes()
    shapes = [block.shape for block in active_blocks(plain, singles, doubles)]
    targets = [RANDOM.normal(size=shape) for shape in shapes]
    mine = rotated(singles, doubles, turns)
    turned.impose(*mine, targets)
    plain.impose(singles, doubles, targets)
    for one, other in zip(flat(*mine), flat(*rotated(singles, doubles, turns)), strict=True):
        assert np.allclose(one, other, atol=1e-12)


def flat(singles, doubles):
    return [*singles, *doubles] if isinstance(singles, tuple) else [singles, doubles]


def active_blocks(seats, singles, doubles):
    (i, a), (j, b) = ((s.occupied.shape[1], s.virtual.shape[1]) for s in (seats.alpha, seats.beta))
    if not isinstance(singles, tuple):
        return np.zeros((i, a)), np.zeros((i, i, a, a))
    shapes = [(i, a), (j, b), (i, i, a, a), (i, j, a, b), (j, j, b, b)]
    return [np.zeros(shape) for shape in shapes]


def rotated(singles, doubles, turns):
    (o, v), (p, w) = turns

    def one(block, left, right):
        return left @ block @ right.T

    def two(block, first, second, third, fourth):
        return np.einsum("ijab,ki,lj,ca,db->klcd", block, first, second, third, fourth)

    if not isinstance(singles, tuple):
        return one(singles, o, v), two(doubles, o, o, v, v)
    return (one(singles[0], o, v), one(singles[1], p, w)), (
        two(doubles[0], o, o, v, v),
        two(doubles[1], o, p, v, w),
        two(doubles[2], p, p, w, w),
    )


def test_the_same_orbitals_have_seats_of_exactly_zero_and_one():
    orbitals = turn(9)
    found = seat(orbitals[:, [2, 3, 4]], orbitals, (2, 4))
    assert found is not None
    assert np.allclose(found.occupied, columns(4, [2, 3]), atol=1e-15)
    assert np.allclose(found.virtual, columns(5, [0]), atol=1e-15)
    assert np.count_nonzero(found.occupied) == 2
    assert found.open


def test_orbitals_outside_the_correlated_ones_have_no_seat():
    orbitals = turn(9)
    assert seat(orbitals[:, [0, 3, 4]], orbitals[:, 1:], (2, 3)) is None
    mixed = orbitals.copy()
    mixed[:, [3, 4]] = orbitals[:, [3, 4]] @ np.array([[0.8, -0.6], [0.6, 0.8]])
    assert seat(mixed[:, [3, 4]], orbitals, (1, 4)) is None


def test_more_active_orbitals_than_correlated_ones_have_no_seat():
    orbitals = turn(9)
    assert seat(orbitals[:, [0, 1, 2, 5]], orbitals[:, 1:], (3, 2)) is None


def test_without_active_orbitals_there_is_nothing_to_overwrite():
    seats = Seats(alpha=chosen([], []), beta=chosen([], []))
    singles, doubles = restricted_amplitudes()
    before = singles.copy(), doubles.copy()
    seats.impose(singles, doubles, (np.zeros(0), np.zeros(0)))
    seats.clear(singles, doubles)
    assert not seats.open
    assert np.array_equal(singles, before[0])
    assert np.array_equal(doubles, before[1])


def test_a_held_solver_overwrites_after_every_update():
    class Library:
        def update_amps(self, singles, doubles, integrals):
            return singles + integrals, doubles + integrals

    solver = Library()
    seats = Seats(alpha=chosen([0], [0]), beta=chosen([0], [0]))
    hold(solver, seats, (np.array([[2.0]]), np.array([[[[3.0]]]])))
    singles, doubles = np.zeros((OCCUPIED, VIRTUAL)), np.zeros((OCCUPIED, OCCUPIED, VIRTUAL, VIRTUAL))
    for _ in range(2):
        singles, doubles = solver.update_amps(singles, doubles, 1.0)
        assert singles[0, 0] == 2
        assert doubles[0, 0, 0, 0] == 3
    assert singles[1, 1] == doubles[1, 1, 1, 1] == 2


@pytest.mark.parametrize(
    ("energies", "place"),
    [
        ([-1.0], 0),
        ([-1.0, -1.2], 1),
        ([-1.0, -1.2, -1.21], 2),
        ([-1.0, -1.01, -1.3], 1),
        ([-1.0, -1.01, -1.3, -1.29], 3),
        ([-1.5, -1.0, -1.1], 2),
    ],
)
def test_the_size_is_taken_where_the_curve_is_flattest_and_never_before_the_flat_step(energies, place):
    """Own rule; there is no published one."""
    assert settled(energies) == place


def test_no_size_no_answer():
    with pytest.raises(ValueError, match="no size"):
        settled([])


def test_the_spread_is_between_the_extremes():
    assert spread([-1.0, -1.3, -1.1]) == pytest.approx(0.3)
