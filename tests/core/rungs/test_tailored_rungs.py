"""TCCSD and TCCSD(T) as rungs: what they refuse, and how they carry on after a stop."""

import numpy as np
import pytest

from plumbrule_core.documents.active_space import Space
from plumbrule_core.errors import PlumbruleError, Stopped
from plumbrule_core.rungs.published_systems import WATER_OLSEN, from_bohr

WATER_LONG = from_bohr("O 0 0 -0.027; H 0 4.545789 -3.176694; H 0 -4.545789 -3.176694")
SMALL, MIDDLE, LARGE = (5, 6), (4, 5, 6, 7), (3, 4, 5, 6, 7, 8)


def test_a_reference_that_weighs_too_little_is_refused_with_what_leads_in_its_place(scene):
    """At three times its bond lengths another determinant leads in water (own measurement, c0 = 0.000)."""
    at = scene(WATER_LONG, basis="6-31G").choose(2, 3, 4, 5, 6, 7)
    with pytest.raises(PlumbruleError) as refused:
        at.compute("TCCSD")
    text = str(refused.value)
    for part in ("sample", "(8,6)", "orbitals 2, 3, 4, 5, 6, 7", "heaviest determinant", "CASSCF", "NEVPT2"):
        assert part in text


def test_a_size_whose_reference_is_too_light_is_left_out_of_the_series(scene):
    at = scene(WATER_LONG, basis="6-31G").choose(5, 6, following=((2, 3, 4, 5, 6, 7),))
    try:
        outcome = at.compute("TCCSD")
    except PlumbruleError:
        pytest.fail("the chosen space has a heavy enough reference")
    assert "TCCSD" not in outcome.growth[1].energies
    assert "CASCI" in outcome.growth[1].energies
    assert any("no TCCSD" in note for note in outcome.notes)
    assert outcome.space == at.bench.space


def test_a_missing_space_is_said(scene):
    with pytest.raises(PlumbruleError, match="no active space"):
        scene("H 0 0 0; H 0 0 0.74", basis="STO-3G").compute("TCCSD")


@pytest.mark.parametrize(
    ("space", "words"),
    [
        (Space(electrons=4, orbitals=(5, 6)), "hold 2 electrons"),
        (Space(electrons=2, orbitals=(5, 99)), "from 1 to 13"),
        (Space(electrons=4, orbitals=(1, 5, 6)), "frozen core"),
    ],
)
def test_a_space_that_does_not_fit_is_refused_in_words(space, words, scene):
    at = scene(WATER_OLSEN.xyz, basis="6-31G", core="frozen")
    at.bench.space = space
    with pytest.raises(PlumbruleError, match=words):
        at.compute("TCCSD")


def test_a_lone_electron_must_be_active(scene):
    at = scene("O 0 0 0; H 0 0 0.97", "ROHF", basis="6-31G", multiplicity=2).choose(3, 4, 6)
    with pytest.raises(PlumbruleError, match="single electron"):
        at.compute("TCCSD")


def test_triples_are_refused_where_tccsd_did_not_converge(stretched_water, monkeypatch):
    monkeypatch.setattr("plumbrule_core.rungs.correlated.iterations.MOST_ITERATIONS", 2)
    at = stretched_water().choose(*SMALL)
    outcome = at.compute("TCCSD")
    assert not outcome.converged
    assert any("did not converge in 2 iterations" in note for note in outcome.notes)
    with pytest.raises(PlumbruleError, match="did not converge"):
        at.compute("TCCSD(T)")


def test_triples_without_tccsd_are_refused(stretched_water):
    with pytest.raises(PlumbruleError, match="TCCSD has not been computed"):
        stretched_water().compute("TCCSD(T)")


@pytest.mark.parametrize(("stage", "k"), [("(2,2)", 3), ("(4,4)", 2), ("(6,6)", 4)])
def test_a_series_carries_on_where_it_was_stopped(stage, k, stretched_water):
    whole = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    expected = whole.compute("TCCSD")
    at = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    with pytest.raises(Stopped):
        at.compute("TCCSD", stop_at=k, stage=stage)
    before = [entry for entry in at.ears["TCCSD"].iterations if not entry[3].startswith("active space")]
    outcome = at.compute("TCCSD")
    after = [entry for entry in at.ears["TCCSD"].iterations if not entry[3].startswith("active space")]
    assert after[0][0] == k + 1
    assert after[0][3] == stage
    assert len(before) + len(after) <= expected.iterations + 1
    assert f"solving the active space {stage}" not in at.ears["TCCSD"].notes
    assert any(note.startswith(f"carried on from iteration {k}") for note in outcome.notes)
    for mine, theirs in zip(outcome.growth, expected.growth, strict=True):
        assert dict(mine.energies) == pytest.approx(dict(theirs.energies), abs=1e-8)


def test_what_is_known_is_taken_up_in_one_iteration(stretched_water):
    at = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    first = at.compute("TCCSD")
    again = at.compute("TCCSD")
    assert len(at.ears["TCCSD"].iterations) <= 2
    assert not [note for note in at.ears["TCCSD"].notes if note.startswith("solving")]
    assert again.energy == pytest.approx(first.energy, abs=1e-8)
    fresh = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    fresh.compute("TCCSD")
    expected = fresh.compute("TCCSD(T)").energy
    assert at.compute("TCCSD(T)").energy == pytest.approx(expected, abs=1e-8)


def test_an_open_shell_carries_on_too(scene):
    at = scene("O 0 0 0; H 0 0 1.3", "ROHF", basis="6-31G", multiplicity=2).choose(3, 4, 5, 6)
    expected = at.compute("TCCSD").energy
    at.shelves.clear()
    with pytest.raises(Stopped):
        at.compute("TCCSD", stop_at=4, stage="(5,4)")
    assert at.compute("TCCSD").energy == pytest.approx(expected, abs=1e-8)
    assert at.ears["TCCSD"].iterations[0][0] == 5


def test_a_checkpoint_of_other_orbitals_or_another_space_is_left_alone(stretched_water, turned):
    at = stretched_water().choose(*MIDDLE)
    expected = at.compute("TCCSD").energy
    at.bench.orbitals = turned(np.array(at.bench.mean_field.mo_coeff), [3, 4])
    assert at.compute("TCCSD").energy == pytest.approx(expected, abs=1e-8)
    assert at.ears["TCCSD"].iterations[-1][0] > 2
    other = at.choose(*LARGE).compute("TCCSD").energy
    assert other == pytest.approx(stretched_water().choose(*LARGE).compute("TCCSD").energy, abs=1e-8)


def test_finished_triples_are_not_computed_again(stretched_water, monkeypatch):
    at = stretched_water().choose(*SMALL, following=(MIDDLE,))
    at.compute("TCCSD")
    first = at.compute("TCCSD(T)")
    monkeypatch.setattr("plumbrule_core.rungs.tccsd_t.triples_energy", None)
    assert at.compute("TCCSD(T)").energy == first.energy
