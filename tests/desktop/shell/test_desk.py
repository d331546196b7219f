import threading
from pathlib import Path

import pytest

from plumbrule_core.documents.findings import Edit, Remedy
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species
from plumbrule_desktop.state import asking, changes
from plumbrule_desktop.state.desk import Desk

LONG = 60_000


def settled(qtbot, desk: Desk) -> None:
    """Wait until the desk knows everything about the chosen question."""
    done: list[bool] = []
    desk._clerk.do(lambda: None, lambda _: done.append(True))
    qtbot.waitUntil(lambda: bool(done) and desk.plan is not None, timeout=LONG)


def test_a_new_casebook_has_one_empty_question_and_nothing_to_undo(fresh_desk: Desk) -> None:
    assert [entry.title for entry in fresh_desk.entries] == ["New question"]
    assert fresh_desk.casebook.undo_label is None
    assert fresh_desk.offer.rungs
    assert "cc-pVTZ" in fresh_desk.offer.bases


def test_an_edit_is_seen_at_once_and_can_be_taken_back_by_its_name(
    qtbot, fresh_desk: Desk, water: Species
) -> None:
    fresh_desk.add_species((water,), "Paste water")
    assert fresh_desk.brief.species == (water,)
    qtbot.waitUntil(lambda: fresh_desk.casebook.undo_label == "Paste water", timeout=LONG)
    fresh_desk.undo()
    qtbot.waitUntil(lambda: fresh_desk.brief.species == (), timeout=LONG)
    assert fresh_desk.casebook.redo_label == "Paste water"
    fresh_desk.redo()
    qtbot.waitUntil(lambda: fresh_desk.brief.species == (water,), timeout=LONG)


def test_an_edit_that_makes_no_sense_changes_nothing_and_says_why(
    qtbot, fresh_desk: Desk, water: Species
) -> None:
    fresh_desk.add_species((water,), "Paste water")
    before = fresh_desk.brief
    with qtbot.waitSignal(fresh_desk.message) as said:
        assert not fresh_desk.edit(changes.set_species("water", "charge", 99), "Change the charge")
    assert "20 or less" in said.args[0]
    assert fresh_desk.brief == before


def test_of_many_quick_edits_the_last_is_what_is_planned_and_stored(
    qtbot, fresh_desk: Desk, hydrogen: Species
) -> None:
    fresh_desk.add_species((hydrogen,), "Paste")
    fresh_desk.edit(asking.asked(fresh_desk.brief, "energy"), "Ask")
    for basis in ("STO-3G", "6-31G", "cc-pVDZ", "STO-3G", "cc-pVDZ"):
        fresh_desk.edit(changes.set_recipe("basis", basis), f"Basis {basis}")
        assert fresh_desk.brief.recipe.basis == (basis,)
    settled(qtbot, fresh_desk)
    assert {task.spec.settings.basis for task in fresh_desk.plan.tasks} == {"cc-pVDZ"}
    assert fresh_desk.casebook.undo_label == "Basis cc-pVDZ"


def test_a_remedy_is_one_step_that_can_be_undone(qtbot, fresh_desk: Desk, water: Species) -> None:
    fresh_desk.add_species((water,), "Paste")
    edits = (Edit(path="recipe.basis", value="cc-pVDZ"), Edit(path="recipe.core", value="all"))
    fresh_desk.apply(Remedy(label="Correlate the core", edits=edits))
    assert (fresh_desk.brief.recipe.basis, fresh_desk.brief.recipe.core) == (("cc-pVDZ",), "all")
    fresh_desk.undo()
    qtbot.waitUntil(lambda: fresh_desk.brief.recipe == Recipe(), timeout=LONG)


def test_questions_are_added_copied_chosen_and_removed_and_one_always_stays(
    qtbot, fresh_desk: Desk, water: Species
) -> None:
    first = fresh_desk.brief_id
    fresh_desk.add_species((water,), "Paste")
    fresh_desk.duplicate()
    qtbot.waitUntil(lambda: len(fresh_desk.entries) == 2, timeout=LONG)
    assert fresh_desk.brief_id != first
    assert fresh_desk.brief.species == (water,)
    fresh_desk.choose(first)
    qtbot.waitUntil(lambda: fresh_desk.brief.title == "", timeout=LONG)
    fresh_desk.remove_brief()
    qtbot.waitUntil(lambda: len(fresh_desk.entries) == 1, timeout=LONG)
    fresh_desk.remove_brief()
    qtbot.waitUntil(lambda: fresh_desk.brief.species == (), timeout=LONG)
    assert len(fresh_desk.entries) == 1


def test_text_that_is_no_molecule_is_refused_in_words(qtbot, fresh_desk: Desk) -> None:
    with qtbot.waitSignal(fresh_desk.message, timeout=LONG) as said:
        fresh_desk.read_text("not a molecule at all", "", lambda species: pytest.fail("it was read"))
    assert said.args[1] == "error"
    assert said.args[0]


def test_a_casebook_that_cannot_be_opened_is_said_and_an_empty_one_takes_its_place(
    qtbot, desk: Desk, tmp_path: Path
) -> None:
    (tmp_path / "other.plumb").write_text("this is no casebook")
    with qtbot.waitSignal(desk.message, timeout=LONG) as said:
        desk.open(tmp_path / "other.plumb")
    assert "other.plumb" in said.args[0]
    qtbot.waitUntil(lambda: desk.plan is not None, timeout=LONG)
    assert desk.casebook.path is None


def test_a_copy_of_an_unsaved_casebook_is_carried_on_in_its_file(
    qtbot, fresh_desk: Desk, water: Species, tmp_path: Path
) -> None:
    fresh_desk.add_species((water,), "Paste")
    path = tmp_path / "mine.plumb"
    fresh_desk.save_copy(path)
    qtbot.waitUntil(lambda: fresh_desk.casebook.path == path, timeout=LONG)
    assert fresh_desk.brief.species == (water,)


def test_the_second_window_on_a_casebook_can_read_but_not_change_it(
    qtbot, desk: Desk, water: Species, tmp_path: Path
) -> None:
    desk.open(tmp_path / "shared.plumb")
    qtbot.waitUntil(lambda: desk.plan is not None, timeout=LONG)
    desk.add_species((water,), "Paste")
    settled(qtbot, desk)
    second = Desk()
    try:
        second.open(tmp_path / "shared.plumb")
        qtbot.waitUntil(lambda: second.plan is not None, timeout=LONG)
        assert second.casebook.read_only
        assert second.brief.species == (water,)
        with qtbot.waitSignal(second.message) as said:
            assert not second.edit(changes.set_species("water", "charge", 1), "Change")
        assert said.args[0] == second.casebook.why_read_only
    finally:
        second.close()


def ask_hydrogen(desk: Desk, hydrogen: Species) -> None:
    """The energy of H2 in a minimal basis."""
    desk.add_species((hydrogen,), "Paste")
    desk.edit(asking.asked(desk.brief, "energy"), "Ask")
    edits = (*changes.set_recipe("basis", "STO-3G"), *changes.set_recipe("rungs", ["HF", "MP2", "CCSD"]))
    desk.edit(edits, "Recipe")


def test_a_run_finishes_with_the_published_energy_and_a_verdict(
    qtbot, fresh_desk: Desk, hydrogen: Species
) -> None:
    """Hartree-Fock -1.1167 hartree at 1.4 bohr in STO-3G: Szabo and Ostlund, Modern Quantum Chemistry."""
    ask_hydrogen(fresh_desk, hydrogen)
    settled(qtbot, fresh_desk)
    moved: list[frozenset[str]] = []
    fresh_desk.run_changed.connect(moved.append)
    fresh_desk.run()
    assert fresh_desk.running
    qtbot.waitUntil(lambda: not fresh_desk.running, timeout=LONG)
    qtbot.waitUntil(
        lambda: fresh_desk.judgement is not None and fresh_desk.judgement.answer is not None, timeout=LONG
    )
    energies = {
        fresh_desk.plan.task(key).spec.rung: task.result.energy
        for key, task in fresh_desk.state.tasks.items()
        if task.result
    }
    assert energies["HF"] == pytest.approx(-1.1167, abs=5e-5)
    assert fresh_desk.judgement.verdict.level != "unknown"
    assert {key for keys in moved for key in keys} >= set(fresh_desk.state.tasks)


def test_a_run_stopped_while_it_starts_ends_stopped_and_can_be_carried_on(
    qtbot, fresh_desk: Desk, hydrogen: Species
) -> None:
    ask_hydrogen(fresh_desk, hydrogen)
    settled(qtbot, fresh_desk)
    said: list[str] = []
    fresh_desk.message.connect(lambda text, _: said.append(text))
    fresh_desk.run()
    fresh_desk.stop()
    assert fresh_desk.stopping
    qtbot.waitUntil(lambda: not fresh_desk.running, timeout=LONG)
    settled(qtbot, fresh_desk)
    assert all(task.result is None for task in fresh_desk.state.tasks.values())
    fresh_desk.run()
    qtbot.waitUntil(lambda: not fresh_desk.running, timeout=LONG)
    settled(qtbot, fresh_desk)
    assert all(task.result is not None for task in fresh_desk.state.tasks.values())
    assert any(text.startswith("Stopped") for text in said)


def test_another_casebook_is_not_opened_over_a_run(qtbot, fresh_desk: Desk, hydrogen: Species) -> None:
    ask_hydrogen(fresh_desk, hydrogen)
    settled(qtbot, fresh_desk)
    fresh_desk.run()
    with qtbot.waitSignal(fresh_desk.message) as said:
        fresh_desk.new()
    assert "Stop it" in said.args[0]
    assert fresh_desk.brief.species == (hydrogen,)
    qtbot.waitUntil(lambda: not fresh_desk.running, timeout=LONG)


def test_an_answer_to_an_older_edit_never_takes_back_a_newer_one(
    qtbot, monkeypatch, fresh_desk: Desk, water: Species
) -> None:
    fresh_desk.add_species((water,), "Paste")
    settled(qtbot, fresh_desk)
    seen: list[str] = []
    refresh = fresh_desk._refresh

    def edit_between(reset: bool = False) -> None:
        """The answers to the first edit are there but not handed over yet when the second is made."""
        refresh(reset)
        if not seen:
            answered = threading.Event()
            fresh_desk._clerk.do(answered.set)
            assert answered.wait(60)
            fresh_desk.brief_changed.connect(lambda: seen.append(fresh_desk.brief.recipe.basis[0]))
            fresh_desk.edit(changes.set_recipe("basis", "cc-pVQZ"), "Second")

    monkeypatch.setattr(fresh_desk, "_refresh", edit_between)
    fresh_desk.edit(changes.set_recipe("basis", "cc-pVDZ"), "First")
    qtbot.waitUntil(lambda: bool(seen), timeout=LONG)
    settled(qtbot, fresh_desk)
    assert set(seen) <= {"cc-pVQZ"}
    assert fresh_desk.brief.recipe.basis == ("cc-pVQZ",)
