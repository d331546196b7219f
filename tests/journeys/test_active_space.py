"""A stretched bond that one determinant cannot describe, from the question to the outcome with its space."""

import json

import pytest

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.questions import ReactionQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.exports.record_json import record_data
from plumbrule_core.session import Session

RUNGS = ("HF", "CCSD", "CCSD(T)")


@pytest.fixture(autouse=True)
def private_cache(tmp_path, monkeypatch):
    monkeypatch.setenv("PLUMBRULE_CACHE", str(tmp_path / "cache"))


def fluoride(name, apart):
    return Species(name=name, atoms=(Atom(symbol="H", x=0, y=0, z=0), Atom(symbol="F", x=0, y=0, z=apart)))


def run_to_end(session, number):
    run = session.run(number, lambda event: None, threads=1, memory_mb=4000)
    assert run.wait(200)


@pytest.mark.slow
def test_a_stopped_question_is_answered_in_an_active_space_by_one_remedy():
    brief = Brief(
        question=ReactionQuestion(within=10.0, terms={"near": -1.0, "far": 1.0}),
        species=(fluoride("near", 0.92), fluoride("far", 3.0)),
        recipe=Recipe(basis=("STO-3G",), rungs=RUNGS),
    )
    session = Session.open(None)
    number = session.add_brief(brief)
    run_to_end(session, number)
    judged = session.judge(number)
    assert judged.verdict.level == "do not rely on it"
    remedies = {remedy.label: remedy for finding in judged.findings for remedy in finding.remedies}
    remedy = remedies["Add an active space, NEVPT2 and TCCSD(T), and run"]
    session.edit(number, remedy.edits, remedy.label)
    run_to_end(session, number)

    judged = session.judge(number)
    assert judged.answer is not None
    assert judged.answer.rung in ("TCCSD(T)", "NEVPT2")
    assert judged.verdict.level == "take care"
    assert any("so the answer stands on" in reason for reason in judged.verdict.reasons)
    assert "active-space choice" in {line.cause for line in judged.budget} or judged.answer.rung == "NEVPT2"
    outcome = json.loads(json.dumps(record_data(session.record(number))))
    session.close()
    far = outcome["species"]["far"]
    assert "Active space" not in far["energies"]
    assert far["active_space"]["electrons"] >= 2
    assert {"s1_max", "zs1", "c0_squared"} <= far["readings"].keys()
    # Two electrons in two half-filled orbitals: an entropy lies between 0 and ln 4.
    assert 0.5 < far["readings"]["s1_max"] <= 1.3863
    numbers, entropy = far["orbitals"]["numbers"], far["orbitals"]["entropy"]
    assert len(numbers) == len(entropy) == len(far["orbitals"]["energies"]) == len(far["mutual_information"])
    assert max(entropy) == pytest.approx(far["readings"]["s1_max"])
    assert {"CASCI"} <= far["growth"][0]["energies"].keys()
