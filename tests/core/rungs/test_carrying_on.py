"""A run that was stopped carries on where it was: same energy, at most one iteration repeated."""

import numpy as np
import pytest

from plumbrule_core.errors import Stopped
from plumbrule_core.rungs.correlated.extrapolation import Extrapolation, space_for

NITROGEN = "N 0 0 0; N 0 0 1.3"
HYDROXYL = "O 0 0 0; H 0 0 0.97"


@pytest.mark.parametrize(("xyz", "multiplicity"), [(NITROGEN, 1), (HYDROXYL, 2)])
@pytest.mark.parametrize("k", [1, 4, 7])
def test_ccsd_carries_on_where_it_was_stopped(xyz, multiplicity, k, climb, ear):
    whole = climb(xyz, "CCSD", multiplicity=multiplicity)
    total = whole.outcomes["CCSD"].iterations
    first = climb(xyz, "HF", multiplicity=multiplicity)
    with pytest.raises(Stopped):
        climb(xyz, "CCSD", multiplicity=multiplicity, on=first, ears={"CCSD": ear(stop_at=k)})
    again = climb(xyz, "CCSD", multiplicity=multiplicity, on=first)
    further = len(again.ears["CCSD"].iterations)
    assert further <= total - k + 1
    assert again.ears["CCSD"].iterations[0][0] == k + 1
    assert again.energy("CCSD") == pytest.approx(whole.energy("CCSD"), abs=1e-7)
    assert again.outcomes["CCSD"].notes == (f"carried on from iteration {k}",)


def test_converged_amplitudes_are_taken_up_again_in_one_or_two_iterations(climb):
    first = climb(NITROGEN, "CCSD")
    again = climb(NITROGEN, "CCSD(T)", on=first)
    assert len(again.ears["CCSD"].iterations) <= 2
    assert again.energy("CCSD") == pytest.approx(first.energy("CCSD"), abs=1e-7)
    assert again.energy("CCSD(T)") == pytest.approx(climb(NITROGEN, "CCSD(T)").energy("CCSD(T)"), abs=1e-7)


def test_amplitudes_bring_their_orbitals_where_the_field_was_computed_anew(climb, ear):
    first = climb(NITROGEN, "HF")
    with pytest.raises(Stopped):
        climb(NITROGEN, "CCSD", on=first, ears={"CCSD": ear(stop_at=5)})
    # Two orbitals with the other sign, as another run may have them.
    first.shelves["CCSD"].kept["orbitals"][:, 3:5] *= -1
    flipped = _with_signs(first.shelves["CCSD"].kept, 10, 21)
    first.shelves["CCSD"].kept = flipped
    del first.shelves["HF"]
    again = climb(NITROGEN, "CCSD", on=first)
    assert again.outcomes["CCSD"].notes == ("carried on from iteration 5",)
    assert again.energy("CCSD") == pytest.approx(climb(NITROGEN, "CCSD").energy("CCSD"), abs=1e-7)


def _with_signs(kept, electrons, virtual):
    """Amplitudes as they are where the second and third correlated orbital have the other sign."""
    from pyscf.cc.ccsd import amplitudes_to_vector, vector_to_amplitudes

    occupied = electrons // 2
    sign = np.ones(occupied)
    sign[1:3] = -1

    def turned(vector):
        t1, t2 = vector_to_amplitudes(vector.astype(float), occupied + virtual, occupied)
        t1, t2 = sign[:, None] * t1, np.einsum("i,j,ijab->ijab", sign, sign, t2)
        return amplitudes_to_vector(t1, t2).astype(vector.dtype)

    rows = {name: np.array([turned(row) for row in kept[name]]) for name in ("vectors", "errors")}
    return {**kept, **rows, "amplitudes": turned(kept["amplitudes"])}


def test_amplitudes_of_another_determinant_are_left_alone(climb):
    first = climb(NITROGEN, "CCSD")
    orbitals = first.shelves["CCSD"].kept["orbitals"]
    orbitals[:, [6, 7]] = orbitals[:, [7, 6]]
    again = climb(NITROGEN, "CCSD", on=first)
    assert again.outcomes["CCSD"].notes == ()
    assert again.energy("CCSD") == pytest.approx(first.energy("CCSD"), abs=1e-7)


def test_a_converged_field_is_verified_and_not_iterated_again(climb):
    first = climb("O 0 0 0; O 0 0 1.2", "HF", multiplicity=3)
    again = climb("O 0 0 0; O 0 0 1.2", "HF", multiplicity=3, on=first)
    assert len(again.ears["HF"].iterations) == 1
    assert not any(stage.startswith("guess") for stage in again.ears["HF"].stages)
    assert again.energy("HF") == pytest.approx(first.energy("HF"), abs=1e-9)
    assert again.bench.stability == first.bench.stability
    assert again.outcomes["HF"].notes == first.outcomes["HF"].notes


def test_a_field_stopped_on_its_way_carries_on_from_its_orbitals(climb, ear):
    whole = climb(NITROGEN, "HF")
    first = climb("H 0 0 0; H 0 0 0.74", "HF")
    first.shelves.clear()
    with pytest.raises(Stopped):
        climb(NITROGEN, "HF", on=first, ears={"HF": ear(stop_at=6)})
    again = climb(NITROGEN, "HF", on=first)
    assert again.ears["HF"].iterations[0][0] == 7
    assert "carried on from iteration 6" in again.outcomes["HF"].notes
    assert again.energy("HF") == pytest.approx(whole.energy("HF"), abs=1e-9)


def test_a_field_checkpoint_of_another_molecule_is_left_alone(climb):
    first = climb("O 0 0 0; H 0 0 0.97", "HF", charge=-1)
    again = climb(NITROGEN, "HF", on=first)
    assert again.energy("HF") == pytest.approx(climb(NITROGEN, "HF").energy("HF"), abs=1e-9)


def test_cisd_starts_from_its_last_vector(climb, ear):
    whole = climb(NITROGEN, "CISD")
    first = climb(NITROGEN, "HF")
    with pytest.raises(Stopped):
        climb(NITROGEN, "CISD", on=first, ears={"CISD": ear(stop_at=6)})
    again = climb(NITROGEN, "CISD", on=first)
    assert again.outcomes["CISD"].iterations < whole.outcomes["CISD"].iterations
    assert again.energy("CISD") == pytest.approx(whole.energy("CISD"), abs=1e-7)


@pytest.mark.parametrize("rung", ["HF", "CISD", "CCSD"])
def test_a_stop_is_passed_on_from_within_the_iterations(rung, climb, ear):
    with pytest.raises(Stopped):
        climb(NITROGEN, rung, ears={rung: ear(stop_at=2)})


def test_a_stop_is_passed_on_from_the_search_among_guesses_and_from_following(climb, ear):
    with pytest.raises(Stopped):
        climb(HYDROXYL, "HF", multiplicity=2, ears={"HF": ear(stop_at=2, stop_stage="guess")})
    with pytest.raises(Stopped):
        climb("N 0 0 0; N 0 0 2.0", "HF", ears={"HF": ear(stop_at=1, stop_stage="following")})


def test_an_extrapolation_put_on_the_shelf_goes_on_as_if_nothing_had_happened():
    matrix = np.diag(np.linspace(0.1, 0.8, 30))
    goal = np.linspace(-1, 1, 30)

    def step(x):
        return matrix @ (x - goal) + goal

    whole = Extrapolation(np.zeros(30))
    x = np.zeros(30)
    for _ in range(8):
        x = whole(step(x))
    half = Extrapolation(np.zeros(30))
    y = np.zeros(30)
    for _ in range(4):
        y = half(step(y))
    half = Extrapolation.carried_on(half.state())
    for _ in range(4):
        y = half(step(y))
    assert np.allclose(x, y, atol=1e-6)
    assert np.linalg.norm(x - goal) < 1e-2 * np.linalg.norm(goal)


def test_the_memory_of_the_extrapolation_shrinks_where_vectors_are_large():
    assert space_for(1000, 1000) == 6
    assert space_for(3_000_000, 1000) == 4
    assert space_for(100_000_000, 1000) == 3
