"""Every export says what the record holds, in a form that others can read."""

import csv
import io
import json
from dataclasses import replace

import pytest

from plumbrule_core import geometry
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.questions import BondQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Unreadable
from plumbrule_core.exports import EXPORTS, save, words
from plumbrule_core.exports.record_json import record_data
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules import RULES
from plumbrule_core.planning import make_plan
from plumbrule_core.question_file import read_question

RECORDS = ("record", "empty_record", "unasked_record")


@pytest.mark.parametrize("kind", RECORDS)
@pytest.mark.parametrize("suffix", EXPORTS)
def test_every_format_can_be_written_at_every_stage_of_the_work(kind, suffix, request):
    assert isinstance(EXPORTS[suffix].write(request.getfixturevalue(kind)), bytes)


def test_every_exporter_is_listed_under_its_own_suffix():
    assert all(exporter.suffix == suffix and exporter.name for suffix, exporter in EXPORTS.items())
    assert {".html", ".csv", ".json", ".xyz", ".toml"} <= set(EXPORTS)


# QCSchema: the required keys of an AtomicResult and those it allows, as the schema itself lists them
# (MolSSI/QCSchema, qcschema/data/vdev/AtomicResult.schema, "required"; looked up).
REQUIRED = {"molecule", "driver", "model", "provenance", "properties", "return_result", "success"}
ALLOWED = REQUIRED | {
    "id",
    "schema_name",
    "schema_version",
    "keywords",
    "extras",
    "protocols",
    "wavefunction",
}


def test_the_results_for_other_programs_keep_to_the_schema(record):
    entries = json.loads(EXPORTS[".json"].write(record))
    assert len(entries) == 4
    for entry in entries:
        assert set(entry) >= REQUIRED
        assert set(entry) <= ALLOWED
        assert entry["schema_name"] == "qcschema_output"
        assert entry["molecule"]["schema_name"] == "qcschema_molecule"
        assert len(entry["molecule"]["geometry"]) == 3 * len(entry["molecule"]["symbols"])
        assert entry["driver"] == "energy"
        assert set(entry["model"]) == {"method", "basis"}
        assert entry["provenance"]["creator"]
    last = entries[-1]
    assert last["return_result"] == last["properties"]["ccsd_total_energy"] == -1.1634
    assert last["properties"]["scf_total_energy"] == -1.1287
    # 0.7412345678901 angstrom in bohr, with CODATA 2022's 0.529177210544 angstrom per bohr.
    assert last["molecule"]["geometry"][-1] == pytest.approx(0.7412345678901 / 0.529177210544, abs=1e-12)


def test_the_table_holds_every_energy_with_its_unit_in_the_header(record):
    rows = list(csv.DictReader(io.StringIO(EXPORTS[".csv"].write(record).decode("utf-8-sig"))))
    energies = {
        (r["species"], r["rung"]): float(r["energy (hartree)"]) for r in rows if r["what"] == "energy"
    }
    assert energies[("h", "HF")] == -0.4993
    assert len(energies) == 4
    (answer,) = (row for row in rows if row["what"] == "answer")
    assert float(answer["value (kJ/mol)"]) == 432.123
    assert float(answer["uncertainty (kJ/mol)"]) == 12.34
    assert {row["reading"] for row in rows if row["what"] == "reading"} >= {
        "T1",
        "stable",
        "natural_occupations",
    }


def test_a_name_that_a_spreadsheet_would_run_is_made_harmless(record):
    from dataclasses import replace

    evil = record.brief.species[0].model_copy(update={"name": "=cmd()"})
    changed = replace(record, brief=record.brief.model_copy(update={"species": (evil,)}))
    rows = csv.DictReader(io.StringIO(EXPORTS[".csv"].write(changed).decode("utf-8-sig")))
    assert "'=cmd()" in {row["species"] for row in rows}


def test_the_coordinates_read_back_with_charge_and_multiplicity(record):
    read = geometry.read_text(EXPORTS[".xyz"].write(record).decode())
    for back, one in zip(read, record.brief.species, strict=True):
        assert (back.formula, back.charge, back.multiplicity) == (one.formula, one.charge, one.multiplicity)
        for a, b in zip(back.atoms, one.atoms, strict=True):
            assert (a.x, a.y, a.z) == pytest.approx((b.x, b.y, b.z), abs=1e-9)


def test_the_question_file_asks_the_same_question(record, tmp_path):
    path = tmp_path / "again.toml"
    path.write_bytes(EXPORTS[".toml"].write(record))
    again = read_question(path)
    assert again.question == record.brief.question
    assert again.recipe == record.brief.recipe
    assert [one.content for one in again.species] == [one.content for one in record.brief.species]


@pytest.mark.parametrize("kind", RECORDS)
def test_the_outcome_for_machines_has_no_null_and_no_unspeakable_number(kind, request):
    text = json.dumps(record_data(request.getfixturevalue(kind)), allow_nan=False)
    assert "null" not in text


def test_what_was_not_computed_is_absent_from_the_outcome(empty_record):
    data = record_data(empty_record)
    assert "answer" not in data
    assert "energies" not in data["species"]["h"]
    assert all("seconds" not in task and task["state"] == "waiting" for task in data["tasks"])


def test_the_outcome_keeps_the_layout_of_the_contract(record):
    data = record_data(record)
    two = data["species"][record.brief.species[1].name]
    assert two["atoms"][0] == ["H", 0.0, 0.0, 0.0]
    assert two["energies"] == {"HF": -1.1287, "CCSD": -1.1634}
    assert two["readings"]["T1"] == 0.031
    assert two["readings"]["stable"] is True
    assert two["verdict"] == {"level": "take care", "headline": "", "reasons": ["T1 is large."]}
    assert data["findings"][0]["remedies"] == ["Add the next basis set"]
    assert data["tasks"][0]["trace"] == [[1, -1.0], [2, -1.1, 1e-6]]
    assert data["provenance"]["machine"] == {"cores": 2, "memory_gb": 24.6}


def test_every_reading_of_one_determinant_has_words():
    read = next(rule.reads for rule in RULES if rule.code == "one-determinant")
    assert set(read) - {"converged"} <= set(words.READING_WORDS)


def test_a_species_named_like_a_fragment_and_the_fragment_both_keep_their_place(record):
    # In H2 cut between its atoms the fragment is called `h2, atom 1`; the user's helium has that name too.
    one, two = (Atom(symbol="H", x=0.0, y=0.0, z=z) for z in (0.0, 0.74))
    helium = Species(name="h2, atom 1", atoms=(Atom(symbol="He", x=0.0, y=0.0, z=0.0),))
    brief = Brief(
        question=BondQuestion(species="h2", cut=(1, 2), within=4.0),
        species=(Species(name="h2", atoms=(one, two)), helium),
        recipe=Recipe(basis=("cc-pVDZ",), rungs=("HF",)),
    )
    plan = make_plan(brief, Machine(cores=1, memory_mb=4000.0, disk_mb=1e5))
    assert plan.faults == ()
    bare = replace(
        record, brief=brief, plan=plan, state=RunState(), results={}, judgement=judge(brief, plan, {})
    )
    data = record_data(bare)
    assert {key: one["formula"] for key, one in data["species"].items()} == {
        "h2": "H2",
        "h2, atom 1": "He",
        "h2, atom 1 (2)": "H",
    }
    assert {task["species"] for task in data["tasks"]} == {"h2", "h2, atom 1 (2)"}


def test_a_file_is_replaced_whole_or_not_at_all(tmp_path, monkeypatch):
    from pathlib import Path

    path = tmp_path / "report.html"
    save(path, b"first")

    def full(self: Path, target: Path) -> Path:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "replace", full)
    with pytest.raises(Unreadable, match="No space left"):
        save(path, b"second")
    assert path.read_bytes() == b"first"
    assert [one.name for one in tmp_path.iterdir()] == ["report.html"]


def test_a_folder_that_is_not_there_is_said_in_words(tmp_path):
    with pytest.raises(Unreadable, match="cannot be written"):
        save(tmp_path / "none" / "report.html", b"")
