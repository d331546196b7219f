"""The command keeps its contract: exit statuses, field names, one line a fault, and no traceback."""

import json
import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from plumbrule_core.headless import endings, main

ONE = """
[question]
kind = "energy"
within = 4.0
[species.h2]
xyz = "H 0 0 0\\nH 0 0 0.74"
[recipe]
basis = "STO-3G"
rungs = ["HF"]
"""

COMMAND = [sys.executable, "-m", "plumbrule_core.headless"]


def read(path: Path):
    return json.loads(path.read_text(), parse_constant=lambda word: pytest.fail(f"{word} is no JSON"))


def test_a_run_answers_with_status_0_and_the_fields_of_the_contract(tmp_path, h2, capsys):
    out = tmp_path / "out.json"
    assert main(["run", str(h2), "--json", str(out), "--threads", "1"]) == 0
    shown = capsys.readouterr()
    assert "answer:" in shown.out
    assert "verdict:" in shown.out
    assert "h2: CCSD(T)/STO-3G: begins" in shown.err

    data = read(out)
    assert data["plumbrule"] == "0.1.0"
    assert data["question"] == {
        "kind": "bond",
        "within": 4.0,
        "unit": "kJ/mol",
        "species": "h2",
        "cut": [1, 2],
    }
    assert set(data["answer"]) >= {"value", "uncertainty", "unit", "rung", "basis", "meets_target"}
    assert set(data["verdict"]) >= {"level", "headline"}
    assert [line["rung"] for line in data["comparison"]] == ["HF", "MP2", "CCSD", "CCSD(T)"]
    assert all(set(line) >= {"rung", "value", "from_best"} for line in data["comparison"])
    assert all(set(line) >= {"cause", "size", "unit", "how", "source"} for line in data["budget"])
    for finding in data["findings"]:
        assert set(finding) >= {"code", "severity", "headline", "consequence", "evidence", "remedies"}
        assert all(isinstance(remedy, str) for remedy in finding["remedies"])
    assert set(data["provenance"]) >= {"versions", "machine", "settings", "citations"}
    assert set(data["provenance"]["machine"]) >= {"cores", "memory_gb"}
    for task in data["tasks"]:
        assert set(task) >= {"id", "species", "rung", "state", "seconds", "memory_mb", "trace"} | {
            "forecast_seconds",
            "forecast_memory_mb",
        }
        assert task["state"] == "done"
    assert "null" not in out.read_text()


def test_the_energies_are_those_of_the_literature(tmp_path, book):
    # H2 at 1.4 bohr in STO-3G: HF -1.1167, full CI (= CCSD) -1.1373; H -0.4666 hartree
    # (Szabo and Ostlund, Modern Quantum Chemistry, sections 3.5.2, 4.3 and table 3.5).
    out = tmp_path / "out.json"
    assert main(["show", str(book), "--json", str(out)]) == 0
    molecule = read(out)["species"]["h2"]
    assert molecule["energies"]["HF"] == pytest.approx(-1.1167, abs=5e-5)
    assert molecule["energies"]["CCSD"] == pytest.approx(-1.1373, abs=5e-5)
    assert molecule["formula"] == "H2"
    assert molecule["atoms"] == [["H", 0.0, 0.0, 0.0], ["H", 0.0, 0.0, 0.7408481]]
    # Orbital energies -0.578 and 0.670 hartree: table 3.5 of the same book.
    assert molecule["orbitals"]["energies"] == pytest.approx([-0.578, 0.670], abs=5e-4)
    assert read(out)["species"]["h2, atom 1"]["energies"]["HF"] == pytest.approx(-0.4666, abs=5e-5)
    # The bond energy of that level, 2 E(H) - E(H2), in kJ/mol with CODATA's 2625.4996 per hartree.
    assert read(out)["answer"]["value"] == pytest.approx((-2 * 0.4666 + 1.1373) * 2625.4996, abs=0.4)


def test_a_casebook_answers_again_without_computing_and_holds_the_question_once(tmp_path, h2, book):
    out = tmp_path / "out.json"
    assert main(["run", str(h2), "--casebook", str(book), "--json", str(out)]) == 0
    assert {task["state"] for task in read(out)["tasks"]} == {"reused"}
    shown = tmp_path / "show.json"
    assert main(["show", str(book), "--json", str(shown)]) == 0
    data = read(shown)
    assert "further" not in data
    assert data["answer"] == read(out)["answer"]
    assert data["species"]["h2"]["energies"] == read(out)["species"]["h2"]["energies"]


def test_show_tells_every_question_of_a_casebook(tmp_path, water, book, capsys):
    shown = tmp_path / "show.json"
    water.write_text(water.read_text().replace("aug-cc-pVTZ", "STO-3G"))
    assert main(["run", str(water), "--casebook", str(book), "--threads", "1"]) == 0
    capsys.readouterr()
    assert main(["show", str(book), "--json", str(shown)]) == 0
    text = capsys.readouterr().out
    assert "The bond energy of H1-H2 in h2" in text
    assert "The total energy of water" in text
    assert read(shown)["further"][0]["question"]["kind"] == "energy"


@pytest.mark.parametrize("suffix", [".html", ".csv", ".json", ".xyz", ".toml"])
def test_a_report_is_written_in_the_format_that_its_ending_names(tmp_path, book, suffix):
    out = tmp_path / f"out{suffix}"
    assert main(["report", str(book), "-o", str(out)]) == 0
    assert out.stat().st_size > 50
    assert [path.name for path in tmp_path.glob(".*")] == []


def test_the_question_file_of_a_report_asks_for_the_same_calculations(tmp_path, book):
    again, one, two = tmp_path / "again.toml", tmp_path / "one.json", tmp_path / "two.json"
    assert main(["show", str(book), "--json", str(one)]) == 0
    assert main(["report", str(book), "-o", str(again)]) == 0
    assert main(["run", str(again), "--casebook", str(book), "--json", str(two)]) == 0
    assert read(two)["answer"] == read(one)["answer"]
    assert [task["id"] for task in read(two)["tasks"]] == [task["id"] for task in read(one)["tasks"]]
    assert {task["state"] for task in read(two)["tasks"]} == {"reused"}


def test_wrong_input_ends_with_2_and_one_line_a_fault_of_every_kind(tmp_path, h2, capsys):
    text = h2.read_text().replace("within = 4.0", "within = -1\nsurplus = 1")
    h2.write_text(text.replace('basis = "STO-3G"', 'basis = "STO-3H"\nrungs = ["HF", "MAGIC"]\ncolour = 1'))
    assert main(["run", str(h2)]) == 2
    lines = capsys.readouterr().err.strip().split("\n")
    keys = [line.partition(":")[0] for line in lines]
    # The unknown keys hide nothing: rungs and basis are judged all the same.
    assert keys[:3] == ["question.within", "question.surplus", "recipe.colour"]
    assert keys[3:] == ["recipe.rungs", "recipe.basis"]
    h2.write_text(h2.read_text().replace("colour = 1", ""))
    assert main(["run", str(h2)]) == 2
    lines = capsys.readouterr().err.strip().split("\n")
    keys = [line.partition(":")[0] for line in lines]
    assert sorted(keys) == ["question.surplus", "question.within", "recipe.basis", "recipe.rungs"]
    assert not list(tmp_path.glob("*.plumb"))


@pytest.mark.parametrize(
    "words",
    [
        ["run"],
        ["run", "nowhere.toml"],
        ["forecast", "nowhere.toml"],
        ["show", "nowhere.plumb"],
        ["report", "nowhere.plumb", "-o", "out.html"],
        ["report", "nowhere.plumb"],
        ["magic"],
        ["run", "x.toml", "--threads", "0"],
        ["run", "x.toml", "--threads", "two"],
        ["run", "x.toml", "--memory", "-1"],
        ["run", "x.toml", "--memory", "nan"],
        ["run", "x.toml", "--json", "/nowhere/at/all.json"],
        ["doctor", "--json", "/nowhere/at/all.json"],
    ],
)
def test_wrong_words_end_with_2_and_say_why(words, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(words) == 2
    said = capsys.readouterr()
    assert said.err.strip()
    assert "Traceback" not in said.err
    assert list(tmp_path.glob("*.plumb")) == []


def test_a_file_that_is_no_casebook_is_refused_and_left_as_it_is(tmp_path, h2, capsys):
    book = tmp_path / "case.plumb"
    book.write_bytes(b"not a casebook at all")
    for words in (["show", str(book)], ["report", str(book), "-o", str(tmp_path / "a.html")]):
        assert main(words) == 2
    assert main(["run", str(h2), "--casebook", str(book)]) == 2
    assert book.read_bytes() == b"not a casebook at all"
    assert "Traceback" not in capsys.readouterr().err


def test_an_unknown_format_is_refused_with_those_that_are_known(tmp_path, book, capsys):
    assert main(["report", str(book), "-o", str(tmp_path / "out.doc")]) == 2
    assert ".html, .csv" in capsys.readouterr().err
    assert main(["report", str(book), "-o", str(tmp_path / "a.html"), "--question", "2"]) == 2
    assert "1 question" in capsys.readouterr().err


def test_a_forecast_computes_nothing_and_says_what_it_would_take(tmp_path, h2, capsys):
    out = tmp_path / "out.json"
    assert main(["forecast", str(h2), "--json", str(out)]) == 0
    data = read(out)
    assert data["forecast"]["seconds"] > 0
    assert data["fits"] is True
    assert {task["rung"] for task in data["tasks"]} == {"HF", "MP2", "CCSD", "CCSD(T)"}
    assert "in all" in capsys.readouterr().out
    assert not list((tmp_path / "cache").glob("shelf/*.npz"))


def test_a_forecast_beyond_the_memory_ends_with_5_unless_told_yes(tmp_path, h2, capsys):
    book = tmp_path / "case.plumb"
    h2.write_text(ONE)
    words = ["run", str(h2), "--memory", "0.15", "--casebook", str(book), "--threads", "1"]
    assert main(words) == 5
    assert "needs" in capsys.readouterr().err
    assert not book.exists()
    assert main([*words, "--yes"]) == 0
    assert book.exists()


def test_more_threads_and_memory_than_the_machine_has_are_cut_with_a_word(tmp_path, h2, book, capsys):
    words = ["run", str(h2), "--casebook", str(book), "--threads", "999", "--memory", "99999"]
    assert main(words) == 0
    said = capsys.readouterr().err
    assert "--threads: 999 is more than" in said
    assert "--memory: 99999 GB is more than" in said


def test_an_interrupt_ends_with_4_and_the_next_run_carries_on(tmp_path, water):
    book, out = tmp_path / "case.plumb", tmp_path / "out.json"
    words = [*COMMAND, "run", str(water), "--casebook", str(book), "--threads", "1"]
    with subprocess.Popen(words, stderr=subprocess.PIPE, stdout=subprocess.PIPE, text=True) as running:
        assert running.stderr is not None
        heard = ""
        for line in running.stderr:
            heard += line
            if "MP2/aug-cc-pVTZ: -" in line:
                break
        asked = time.monotonic()
        running.send_signal(signal.SIGINT)
        rest = running.stderr.read()
        assert running.wait(30) == 4
        assert time.monotonic() - asked < 10
    assert f"the results that had finished are kept in {book}" in rest
    assert "carries on" in rest
    assert "Traceback" not in heard + rest
    assert main(["show", str(book), "--json", str(out)]) == 0
    states = {task["rung"]: task["state"] for task in read(out)["tasks"]}
    assert states["HF"] == states["MP2"] == "done"
    assert states["CCSD(T)"] in ("stopped", "waiting")
    assert "CCSD(T)" not in read(out)["species"]["water"]["energies"]
    cheaper = water.read_text().replace("[recipe]", '[recipe]\nrungs = ["HF", "MP2"]')
    water.write_text(cheaper)
    assert main(["run", str(water), "--casebook", str(book), "--json", str(out), "--threads", "1"]) == 0
    assert {task["state"] for task in read(out)["tasks"]} == {"reused"}


def test_a_failed_calculation_ends_with_3_and_names_it(tmp_path, h2, capsys, monkeypatch):
    # A worker that cannot be started at all: the same road as a crash of a library inside it.
    monkeypatch.setattr(sys, "executable", "/nowhere/python")
    assert main(["run", str(h2), "--casebook", str(tmp_path / "a.plumb"), "--threads", "1"]) == 3
    said = capsys.readouterr().err
    assert "h2: HF/STO-3G failed" in said
    assert "carries on" in said
    assert "error of the program" not in said
    assert "Traceback" not in said


def test_without_a_casebook_a_failure_says_that_nothing_is_kept_and_how_to_keep_it(h2, capsys, monkeypatch):
    monkeypatch.setattr(sys, "executable", "/nowhere/python")
    assert main(["run", str(h2), "--threads", "1"]) == 3
    said = capsys.readouterr().err
    assert "without --casebook no result is kept" in said
    assert "(T), starts again" in said
    assert f"plumbrule run {h2} --casebook {h2.with_suffix('.plumb')}" in said
    assert "had finished" not in said


def test_doctor_finds_a_healthy_machine_and_proves_it_with_a_known_energy(tmp_path, capsys):
    out = tmp_path / "out.json"
    assert main(["doctor", "--json", str(out)]) == 0
    data = read(out)
    assert data["problems"] == []
    assert data["trial"]["energy"] == pytest.approx(data["trial"]["known"], abs=5e-5)
    assert data["versions"]["pyscf"]
    assert "no problem found" in capsys.readouterr().out


def test_an_error_of_the_program_is_one_line_and_a_log(tmp_path, h2, capsys, monkeypatch):
    from plumbrule_core.headless import run

    def broken(*words: object) -> None:
        raise ZeroDivisionError("a bug")

    monkeypatch.setattr(run, "planned", broken)
    assert main(["run", str(h2)]) == 3
    (line,) = capsys.readouterr().err.strip().split("\n")
    log = Path(re.search(r"the details are in (.*)$", line)[1])
    assert "ZeroDivisionError" in log.read_text()
    assert log.parent == tmp_path / "cache"


def test_a_closed_pipe_is_no_error(h2):
    with subprocess.Popen(
        [*COMMAND, "forecast", str(h2)], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as running:
        running.stdout.close()
        assert running.wait(60) == 0
        assert b"Traceback" not in running.stderr.read()


def test_help_and_version_end_with_0(capsys):
    assert main(["--help"]) == 0
    assert main(["--version"]) == 0
    assert main(["run", "--help"]) == 0
    assert "plumbrule 0.1.0" in capsys.readouterr().out


def test_without_words_the_window_is_opened(monkeypatch):
    import types

    opened = []
    app = types.ModuleType("plumbrule_desktop.app")
    app.main = lambda words: opened.append(words) or 0  # type: ignore[attr-defined]
    monkeypatch.setitem(sys.modules, "plumbrule_desktop.app", app)
    assert main([]) == main(["--demo"]) == main(["some.plumb"]) == 0
    assert opened == [[], ["--demo"], ["some.plumb"]]


def test_the_command_loads_no_qt_and_no_pyscf():
    code = (
        "import sys; from plumbrule_core.headless import main; main(['--version']);"
        "sys.exit(bool({'pyscf', 'rdkit', 'PySide6', 'vtkmodules'} & set(sys.modules)))"
    )
    assert subprocess.run([sys.executable, "-c", code], timeout=60, check=False).returncode == 0


GOOD = (Path(__file__).parent / "conftest.py").read_text().partition('H2 = """')[2].partition('"""')[0]


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    changes=st.lists(
        st.tuples(
            st.integers(0, len(GOOD)), st.integers(0, 12), st.text("[]{}=\"'.,#\n-0129aHk\0é", max_size=4)
        ),
        min_size=1,
        max_size=3,
    )
)
def test_no_mangled_question_file_ends_in_anything_but_2_or_a_clean_forecast(tmp_path, capsys, changes):
    text = GOOD
    for place, cut, put in changes:
        text = text[:place] + put + text[place + cut :]
    path = tmp_path / "mangled.toml"
    path.write_text(text, encoding="utf-8")
    capsys.readouterr()
    status = main(["forecast", str(path)])
    said = capsys.readouterr().err
    assert status in (0, 2)
    assert status == 0 or said.strip()
    assert "error of the program" not in said


def test_statuses_are_those_of_the_contract():
    statuses = (endings.ANSWERED, endings.WRONG_INPUT, endings.FAILED, endings.STOPPED, endings.TOO_LARGE)
    assert statuses == (0, 2, 3, 4, 5)


def test_the_environment_of_the_tests_is_private(tmp_path):
    assert os.environ["PLUMBRULE_CACHE"].startswith(str(tmp_path))
