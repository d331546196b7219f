"""Planning with an active space: which tasks know of it, what is refused at the door, what it costs."""

import pytest

from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.questions import EnergyQuestion, ReactionQuestion
from plumbrule_core.documents.recipe import ActiveSpace, Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.planning import make_plan
from plumbrule_core.rungs import RUNGS, SPACE, stands_on_space

MACHINE = Machine(cores=2, memory_mb=8000.0, disk_mb=50000.0)
RUNGS_ASKED = ("CCSD(T)", "NEVPT2", "TCCSD(T)")


def nitrogen(name="n2", apart=1.1, **more):
    atoms = tuple(Atom(symbol="N", x=0, y=0, z=z) for z in (0, apart))
    return Species(name=name, atoms=atoms, **more)


def plan_of(*species, rungs=RUNGS_ASKED, **space):
    recipe = Recipe(basis=("cc-pVDZ",), rungs=rungs, active_space=ActiveSpace(**space) if space else None)
    question = EnergyQuestion(within=4.0)
    if len(species) > 1:
        question = ReactionQuestion(within=4.0, terms={species[0].name: -1.0, species[1].name: 1.0})
    return make_plan(Brief(question=question, species=species, recipe=recipe), MACHINE)


def faults_of(*species, **more):
    plan = plan_of(*species, **more)
    assert plan.tasks == ()
    return {fault.where: fault.says for fault in plan.faults}


def spaces_of(plan):
    return {task.spec.rung: task.spec.space for task in plan.tasks}


def test_the_rung_that_finds_the_space_is_added_and_only_what_stands_on_it_knows_the_request():
    plan = plan_of(nitrogen())
    found = spaces_of(plan)
    assert {rung for rung, space in found.items() if space is not None} == {
        SPACE,
        "CASSCF",
        "NEVPT2",
        "TCCSD",
        "TCCSD(T)",
    }
    assert found[SPACE] == SpaceRequest()
    assert all(
        SPACE in task.needs
        for task in plan.tasks
        if stands_on_space(task.spec.rung) and task.spec.rung != SPACE
    )


def test_another_space_changes_the_identity_of_what_stands_on_it_and_of_nothing_else():
    one, other = (
        {task.spec.rung: task.id for task in plan.tasks}
        for plan in (plan_of(nitrogen()), plan_of(nitrogen(), choice="set", electrons=6, count=6))
    )
    assert {rung for rung in one if one[rung] != other[rung]} == {
        rung for rung in one if stands_on_space(rung)
    }


def test_no_plan_without_such_a_rung_knows_of_a_space():
    assert not any(plan_of(nitrogen(), rungs=("CCSD(T)",)).tasks[k].spec.space for k in range(3))


def test_what_the_user_set_reaches_the_tasks_word_for_word():
    plan = plan_of(
        nitrogen(), choice="set", electrons=6, orbitals=(5, 6, 7, 8, 9, 10), solver="exact", grow=False
    )
    assert not plan.faults
    request = spaces_of(plan)["TCCSD(T)"]
    assert (request.choice, request.electrons, request.orbitals) == ("set", 6, (5, 6, 7, 8, 9, 10))
    assert (request.solver, request.grow) == ("exact", False)


@pytest.mark.parametrize(
    ("space", "where", "says"),
    [
        ({"choice": "none"}, "recipe.active_space.choice", "NEVPT2, TCCSD(T) cannot do without"),
        ({"choice": "set", "count": 6}, "recipe.active_space.electrons", "the number of its electrons"),
        ({"choice": "set", "electrons": 6}, "recipe.active_space.orbitals", "count = 6 around the gap"),
        (
            {"choice": "set", "electrons": 6, "count": 6, "orbitals": (5, 6)},
            "recipe.active_space.orbitals",
            "not both",
        ),
        ({"choice": "propose", "electrons": 6}, "recipe.active_space.electrons", "no effect"),
        (
            {"choice": "set", "electrons": 5, "count": 6},
            "recipe.active_space",
            "n2: 5 active electrons do not fit",
        ),
        ({"choice": "set", "electrons": 2, "orbitals": (1, 8)}, "recipe.active_space", "core is frozen"),
        ({"choice": "set", "electrons": 2, "orbitals": (7, 99)}, "recipe.active_space", "from 1 to 28"),
        ({"choice": "set", "electrons": 4, "orbitals": (7, 8)}, "recipe.active_space", "hold 2 electrons"),
        (
            {"choice": "set", "electrons": 10, "count": 26, "solver": "exact"},
            "recipe.active_space",
            "determinants",
        ),
    ],
)
def test_a_space_that_cannot_be_is_refused_at_its_key(space, where, says):
    assert says in faults_of(nitrogen(), **space)[where]


def test_every_species_that_the_space_does_not_fit_is_named():
    triplet = nitrogen("raised", multiplicity=3)
    says = faults_of(nitrogen(), triplet, choice="set", electrons=2, orbitals=(7, 8))["recipe.active_space"]
    assert not says.startswith("n2")
    assert says.startswith("raised")


def test_a_space_that_was_set_has_its_own_price_and_one_beyond_memory_is_forecast_so():
    small, large = (
        {task.spec.rung: task.forecast for task in plan.tasks}
        for plan in (
            plan_of(nitrogen(), choice="set", electrons=2, count=2),
            plan_of(nitrogen(), choice="set", electrons=10, count=20),
        )
    )
    assert small["CASSCF"].sure != "a guess"
    assert small["CASSCF"].seconds < large["CASSCF"].seconds
    assert large["CASSCF"].memory_mb > MACHINE.memory_mb


def test_spaces_of_several_species_are_said_to_be_their_own():
    proposed = plan_of(nitrogen(), nitrogen("far", 2.0))
    assert any("own active space" in note and "choice = 'set'" in note for note in proposed.notes)
    set_alike = plan_of(nitrogen(), nitrogen("far", 2.0), choice="set", electrons=6, count=6)
    assert not any("own active space" in note for note in set_alike.notes)


def test_the_detection_is_no_wave_function_of_the_ladder():
    assert [name for name, rung in RUNGS.items() if rung.kind == "detection"] == [SPACE]
