"""Whole stories through the session: ask, run, stop, carry on, judge, reopen, export."""

import threading

import pytest

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.events import Failed, Started
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.questions import EnergyQuestion, ReactionQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import CasebookError, Refused
from plumbrule_core.session import Session


@pytest.fixture(autouse=True)
def private_cache(tmp_path, monkeypatch):
    monkeypatch.setenv("PLUMBRULE_CACHE", str(tmp_path / "cache"))


def dihydrogen(apart=0.741):
    return Species(
        name="dihydrogen", atoms=(Atom(symbol="H", x=0, y=0, z=0), Atom(symbol="H", x=0, y=0, z=apart))
    )


def water():
    rows = (("O", 0, 0, 0.1178), ("H", 0, 0.7555, -0.4712), ("H", 0, -0.7555, -0.4712))
    return Species(name="water", atoms=tuple(Atom(symbol=s, x=x, y=y, z=z) for s, x, y, z in rows))


def ask(species, basis="STO-3G", rungs=("HF", "MP2", "CCSD", "CCSD(T)")):
    return Brief(
        title=species.name,
        question=EnergyQuestion(within=10.0, species=species.name),
        species=(species,),
        recipe=Recipe(basis=(basis,), rungs=rungs),
    )


def run_to_end(session, brief_id, heard=None):
    run = session.run(
        brief_id, heard.append if heard is not None else lambda event: None, threads=1, memory_mb=2000
    )
    assert run.wait(120)


def test_a_question_is_answered_kept_and_answered_again_without_computing(tmp_path):
    path = tmp_path / "case.plumb"
    session = Session.open(path)
    number = session.add_brief(ask(dihydrogen()))
    run_to_end(session, number)
    energy = session.judge(number).species[0].energies["CCSD(T)"]
    session.close()

    again = Session.open(path)
    (entry,) = again.briefs()
    assert again.judge(entry.id).species[0].energies["CCSD(T)"] == energy
    assert {task.state for task in again.state(entry.id).tasks.values()} == {"done"}
    heard = []
    run_to_end(again, entry.id, heard)
    assert {event.event for event in heard} <= {"result", "hello"}
    assert all(event.reused for event in heard if event.event == "result")
    again.close()


def test_the_energy_is_that_of_the_literature():
    # H2 at 1.4 bohr in STO-3G: HF -1.1167 hartree, full CI -1.1373 (Szabo and Ostlund,
    # Modern Quantum Chemistry, sections 3.5.2 and 4.3); for two electrons CCSD is full CI.
    session = Session.open(None)
    number = session.add_brief(ask(dihydrogen(1.4 * 0.529177210544)))
    run_to_end(session, number)
    energies = session.judge(number).species[0].energies
    assert energies["HF"] == pytest.approx(-1.1167, abs=5e-5)
    assert energies["CCSD"] == pytest.approx(-1.1373, abs=5e-5)
    session.close()


def test_a_stopped_run_keeps_what_finished_and_carries_on():
    session = Session.open(None)
    number = session.add_brief(ask(water(), "cc-pVDZ"))
    seen = threading.Event()

    def heard(event):
        if event.event == "iteration" and event.task.endswith(session.plan(number).tasks[-2].id[-6:]):
            seen.set()

    run = session.run(number, heard, threads=1, memory_mb=2000)
    assert seen.wait(60)
    run.stop()
    assert run.wait(10)
    states = [session.state(number).tasks[task.id].state for task in session.plan(number).tasks]
    assert states[0] == "done"
    run_to_end(session, number)
    done = {session.state(number).tasks[task.id].state for task in session.plan(number).tasks}
    assert done <= {"done", "reused"}
    session.close()


def test_a_question_with_faults_is_refused_and_nothing_runs():
    session = Session.open(None)
    number = session.add_brief(ask(dihydrogen(), basis="cc-pVXZ", rungs=("HF", "MAGIC")))
    with pytest.raises(Refused) as refused:
        session.run(number, lambda event: None)
    assert {fault.where for fault in refused.value.faults} == {"recipe.basis", "recipe.rungs"}
    session.close()


def test_a_second_session_on_one_casebook_reads_only_and_says_so(tmp_path):
    path = tmp_path / "case.plumb"
    first = Session.open(path)
    number = first.add_brief(ask(dihydrogen()))
    second = Session.open(path)
    assert second.read_only
    assert second.why_read_only
    with pytest.raises(CasebookError):
        second.run(number, lambda event: None)
    second.close()
    first.close()


def test_a_remedy_is_one_step_of_undo():
    session = Session.open(None)
    number = session.add_brief(ask(dihydrogen()))
    before = session.brief(number)
    session.edit(number, [Edit(path="recipe.basis", value=["cc-pVDZ"])], "Use cc-pVDZ")
    assert session.brief(number).recipe.basis == ("cc-pVDZ",)
    assert session.undo_label == "Use cc-pVDZ"
    assert session.undo() == "Use cc-pVDZ"
    assert session.brief(number) == before
    session.close()


def test_a_reaction_of_a_species_with_itself_costs_nothing():
    one, two = dihydrogen(), dihydrogen().model_copy(update={"name": "the same"})
    question = ReactionQuestion(within=4.0, terms={"dihydrogen": -1.0, "the same": 1.0})
    session = Session.open(None)
    number = session.add_brief(Brief(question=question, species=(one, two), recipe=Recipe(basis=("STO-3G",))))
    run_to_end(session, number)
    assert session.judge(number).answer.value == pytest.approx(0.0, abs=1e-9)
    session.close()


def test_every_format_is_written_and_an_unknown_one_refused(tmp_path):
    from plumbrule_core.errors import Unreadable

    session = Session.open(None)
    number = session.add_brief(ask(dihydrogen()))
    run_to_end(session, number)
    for suffix in session.export_suffixes():
        session.export(number, tmp_path / f"out{suffix}")
        assert (tmp_path / f"out{suffix}").stat().st_size > 50
    with pytest.raises(Unreadable):
        session.export(number, tmp_path / "out.doc")
    session.close()


def stored_again(session, number, rung, **changes):
    """Change the stored result of one rung, as an earlier run might have left it."""
    (task,) = (t for t in session.plan(number).tasks if t.spec.rung == rung)
    result = session.record(number).results[task.id].model_copy(update=changes)
    session._casebook.put_result(result)
    return task.id


@pytest.mark.parametrize("flaw", [{"converged": False}, {"unchecked": True}])
def test_what_did_not_converge_or_was_not_checked_is_computed_again_and_replaced(tmp_path, flaw):
    path = tmp_path / "case.plumb"
    session = Session.open(path)
    number = session.add_brief(ask(dihydrogen()))
    run_to_end(session, number)
    changed = stored_again(session, number, "CCSD", **flaw)
    heard = []
    run_to_end(session, number, heard)
    assert [e.task for e in heard if e.event == "result" and not e.reused] == [changed]
    assert session.record(number).results[changed].settled
    session.close()


def test_a_hartree_fock_that_moved_is_told_and_never_mixed_with_what_stood_on_the_old_one():
    session = Session.open(None)
    number = session.add_brief(ask(water()))
    run_to_end(session, number)
    before = session.judge(number).species[0].energies
    hartree_fock = stored_again(session, number, "HF", energy=before["HF"] + 0.01)
    assert set(session.judge(number).species[0].energies) == {"HF"}
    heard = []
    run_to_end(session, number, heard)
    assert session.judge(number).species[0].energies == pytest.approx(before, abs=1e-6)
    (result,) = (e.result for e in heard if e.event == "result" and e.task == hartree_fock and not e.reused)
    assert "HF reached another solution than before" in result.notes[0]
    session.close()


def test_a_run_keeps_the_trace_and_the_log_of_what_is_reused():
    session = Session.open(None)
    number = session.add_brief(ask(water()))
    run_to_end(session, number)
    before = session.state(number).tasks
    run_to_end(session, number)
    after = session.state(number).tasks
    assert {task.state for task in after.values()} == {"reused"}
    assert any(task.trace for task in before.values())
    assert {key: (t.trace, t.log) for key, t in after.items()} == {
        key: (t.trace, t.log) for key, t in before.items()
    }
    session.close()


def test_the_judgement_hears_of_failed_tasks_until_they_run_again(monkeypatch):
    from plumbrule_core import judgement

    heard = []
    judge = judgement.judge

    def listening(brief, plan, results, failed):
        heard.append(dict(failed))
        return judge(brief, plan, results, failed=failed)

    monkeypatch.setattr(judgement, "judge", listening)
    session = Session.open(None)
    number = session.add_brief(ask(dihydrogen()))
    run_to_end(session, number)
    task = session.plan(number).tasks[-1]
    session.judge(number)
    state = session.state(number).tasks[task.id]
    session._fold(number, Failed(seq=10**6, task=task.id, reason="the moon"))
    session.judge(number)
    assert heard == [{}, {task.id: "the moon"}]
    session._fold(number, Started(seq=10**6 + 1, task=task.id))
    session.judge(number)
    assert heard[2:] == [{}]
    assert state.state == "done"
    session.close()
