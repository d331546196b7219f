"""Proposals from recorded profiles: exact solutions of valence windows, cc-pVDZ, PySCF 2.14 (profiles.json).

The spaces expected are those of the project's own trial of the rule on these molecules, and for N2, F2,
ethylene and ozone the spaces that the literature works with: (6,6) of N2 along its bond, (2,2) of F2 and of
twisted ethylene, (12,9) of ozone.
"""

import json
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from plumbrule_core.correlation.asked import check
from plumbrule_core.correlation.growth import agree, growth_spaces
from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.proposal import cuts, nested, propose, space_of
from plumbrule_core.correlation.reasons import number_words
from plumbrule_core.documents.active_space import Space

RECORDED = json.loads((Path(__file__).parent / "profiles.json").read_text())


def recorded(name):
    found = RECORDED[name]
    size = len(found["orbitals"])
    information = np.zeros((size, size))
    information[np.tril_indices(size, -1)] = found["pairs"]
    return Profile(
        orbitals=tuple(found["orbitals"]),
        energies=np.array(found["energies"]),
        reference=tuple(found["reference"]),
        valence=tuple(found["valence"]),
        occupations=np.array(found["occupations"]),
        entropies=np.array(found["entropies"]),
        mutual_information=information + information.T,
        energy=found["energy"],
        c0_squared=found["c0_squared"],
        method="exact",
        settled=True,
        change=0.0,
    )


def invented(entropies, pairs, reference, energies=None):
    size = len(entropies)
    information = np.zeros((size, size))
    for (p, q), value in pairs.items():
        information[p, q] = information[q, p] = value
    return Profile(
        orbitals=tuple(range(1, size + 1)),
        energies=np.arange(size, dtype=float) if energies is None else np.array(energies),
        reference=reference,
        valence=(True,) * size,
        occupations=np.array(reference, dtype=float),
        entropies=np.array(entropies),
        mutual_information=information,
        energy=-1.0,
        c0_squared=0.8,
        method="exact",
        settled=True,
        change=0.0,
    )


@pytest.mark.parametrize(
    ("name", "label", "orbitals"),
    [
        ("N2 1.0977", "(4,4)", (6, 7, 8, 9)),
        ("N2 2.2", "(6,6)", (5, 6, 7, 8, 9, 10)),
        ("F2", "(2,2)", (7, 10)),
        ("C2", "(6,6)", (4, 5, 6, 7, 8, 9)),
        ("ethene 90", "(2,2)", (8, 9)),
        ("ozone", "(12,9)", (7, 8, 9, 10, 11, 12, 13, 14, 15)),
    ],
)
def test_the_space_is_the_one_that_these_molecules_are_known_for(name, label, orbitals):
    proposal = propose(recorded(name))
    assert (proposal.space.label, proposal.space.orbitals) == (label, orbitals)
    assert proposal.step
    assert not proposal.calm


def test_a_calm_molecule_gets_no_space_and_is_told_why():
    proposal = propose(recorded("water"))
    assert proposal.calm
    assert (proposal.space.electrons, proposal.space.orbitals) == (0, ())
    assert "One determinant describes it" in proposal.space.why
    assert "0.13" in proposal.space.why


def test_where_there_is_no_step_that_is_said():
    proposal = propose(recorded("ethene"))
    assert not proposal.step
    assert proposal.space.why.startswith("No step stands out")


def test_the_reason_says_what_one_group_more_or_less_would_change():
    why = propose(recorded("C2")).space.why
    assert "orbitals 4 to 9" in why
    assert "One group less would leave out orbitals 5, 6, 8 and 9" in why
    assert "One group more would add orbitals 3 and 10" in why


def test_the_second_best_space_of_fluorine_takes_in_the_lone_pairs_and_their_partners():
    found = sorted(cuts(recorded("F2")), key=lambda cut: -cut.score)
    assert space_of(recorded("F2"), found[1].members).label == "(6,6)"


@pytest.mark.parametrize("name", sorted(RECORDED))
def test_no_space_of_the_series_parts_a_degenerate_pair_and_each_lies_within_the_next(name):
    profile = recorded(name)
    series = nested(profile)
    assert series
    for members, more in pairwise(series):
        assert set(members) < set(more)
    for members in series:
        space = space_of(profile, members)
        assert not [said for said in check(space, profile) if "has the energy of" in said or "paired" in said]
        filled = {profile.reference[k] for k in members}
        assert filled == {0, 2}


def test_the_order_of_the_orbitals_does_not_matter():
    profile = recorded("C2")
    turn = np.random.default_rng(1).permutation(len(profile.orbitals))
    turned = replace(
        profile,
        orbitals=tuple(profile.orbitals[k] for k in turn),
        energies=profile.energies[turn],
        reference=tuple(profile.reference[k] for k in turn),
        valence=tuple(profile.valence[k] for k in turn),
        occupations=profile.occupations[turn],
        entropies=profile.entropies[turn],
        mutual_information=profile.mutual_information[np.ix_(turn, turn)],
    )
    assert sorted(propose(turned).space.orbitals) == sorted(propose(profile).space.orbitals)


def test_a_weak_partner_tied_to_a_strong_orbital_stays_with_it():
    # The cut after the first two would part 3 from 2.
    profile = invented([0.6, 0.55, 0.3, 0.02, 0.02], {(0, 2): 0.2, (0, 1): 0.1}, (2, 2, 0, 0, 0))
    assert propose(profile).space.orbitals == (1, 2, 3)


def test_orbitals_of_one_energy_come_in_together():
    profile = invented(
        [0.5, 0.5, 0.45, 0.03, 0.02],
        {(0, 2): 0.4},
        (2, 2, 0, 0, 0),
        energies=[-0.5, -0.5, 0.2, 0.2002, 1.0],
    )
    assert propose(profile).space.orbitals == (1, 2, 3, 4)


def test_single_electrons_are_always_active():
    profile = invented([0.02, 0.5, 0.01, 0.01, 0.45], {(1, 4): 0.4}, (2, 2, 1, 1, 0))
    assert propose(profile).space == propose(profile).space.model_copy(
        update={"electrons": 4, "orbitals": (2, 3, 4, 5)}
    )


def test_a_space_needs_orbitals_that_electrons_can_move_between():
    profile = invented([0.5, 0.3, 0.02], {}, (2, 2, 0))
    assert all({profile.reference[k] for k in members} == {0, 2} for members in nested(profile))


def test_a_window_without_orbitals_is_calm():
    assert propose(invented([], {}, ())).calm


def test_growth_goes_from_within_the_chosen_space_to_beyond_it():
    profile = recorded("C2")
    chosen = propose(profile).space
    series = growth_spaces(profile, chosen, lambda space: True)
    assert [space.label for space in series][:3] == ["(2,2)", "(6,6)", "(8,8)"]
    assert chosen in series
    for small, large in pairwise(series):
        assert set(small.orbitals) < set(large.orbitals)


def test_growth_leaves_out_what_no_solver_reaches_but_never_the_chosen_space():
    profile = recorded("C2")
    chosen = propose(profile).space
    assert growth_spaces(profile, chosen, lambda space: False) == (chosen,)
    assert growth_spaces(profile, propose(recorded("water")).space, lambda space: True) == ()


def test_growth_of_a_set_space_keeps_its_orbitals():
    profile = recorded("N2 2.2")
    chosen = Space(electrons=4, orbitals=(5, 6, 8, 10), why="Set by the user.")
    series = growth_spaces(profile, chosen, lambda space: True)
    assert chosen in series
    assert all(set(chosen.orbitals) <= set(space.orbitals) for space in series[series.index(chosen) :])


def test_a_set_space_beyond_the_window_does_not_grow():
    chosen = Space(electrons=2, orbitals=(7, 99), why="Set by the user.")
    assert growth_spaces(recorded("N2 2.2"), chosen, lambda space: True) == (chosen,)


def test_molecules_of_one_question_get_spaces_of_one_size():
    near, far = agree([propose(recorded("N2 1.0977")), propose(recorded("N2 2.2"))])
    assert near.label == far.label == "(6,6)"
    assert set(near.orbitals) == set(far.orbitals) == {5, 6, 7, 8, 9, 10}
    assert "Extended by orbitals 5 and 10" in near.why
    assert "Extended" not in far.why


def test_a_calm_molecule_takes_part_where_another_is_not():
    calm, twisted = agree([propose(recorded("ethene")), propose(recorded("ethene 90"))])
    assert calm.label == twisted.label == "(2,2)"
    ethene = recorded("ethene")
    quiet = replace(
        ethene, entropies=0.3 * ethene.entropies, mutual_information=0.3 * ethene.mutual_information
    )
    assert propose(quiet).calm
    assert agree([propose(quiet), propose(recorded("ethene 90"))])[0].orbitals == (8, 9)


def test_calm_molecules_among_themselves_stay_without_a_space():
    calm = propose(recorded("water"))
    assert [space.label for space in agree([calm, calm])] == ["(0,0)", "(0,0)"]
    assert agree([]) == ()


def test_a_space_that_parts_a_pair_is_told_so():
    said = check(Space(electrons=4, orbitals=(5, 6, 8, 10)), recorded("N2 2.2"))
    assert any(
        "orbital 7 is left out, though it has the energy of orbital 6" in one or "paired" in one
        for one in said
    )
    assert any("orbital 9" in one for one in said)


def test_a_missing_partner_is_named_with_its_mutual_information():
    said = check(Space(electrons=6, orbitals=(5, 6, 7, 8, 9)), recorded("N2 2.2"))
    assert any("orbital 10 is left out, though it is paired with orbital 5" in one for one in said)


def test_a_member_without_use_is_named():
    profile = recorded("N2 2.2")
    said = check(Space(electrons=8, orbitals=(3, 5, 6, 7, 8, 9, 10)), profile)
    place = profile.orbitals.index(3)
    assert min(profile.occupations[place], 2 - profile.occupations[place]) < 0.02
    assert any(one.startswith("orbital 3 holds") for one in said)


def test_a_strong_orbital_left_out_is_named():
    said = check(Space(electrons=2, orbitals=(3, 10)), recorded("C2"))
    assert any("correlated more strongly" in one for one in said)


def test_nothing_speaks_against_the_proposed_space():
    for name in ("N2 2.2", "C2", "ethene 90"):
        profile = recorded(name)
        assert check(propose(profile).space, profile) == ()


def test_numbers_are_written_as_runs():
    assert number_words([5, 6, 7, 10, 12, 13]) == "orbitals 5 to 7, 10, 12 and 13"
    assert number_words([4]) == "orbital 4"
