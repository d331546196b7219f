from types import SimpleNamespace

import pytest
from PySide6.QtCore import QModelIndex, Qt
from PySide6.QtTest import QAbstractItemModelTester

from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.results import Reading
from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_desktop.models.grid import GridModel
from plumbrule_desktop.models.readings import reading_name, readings_table, task_readings, value_words
from plumbrule_desktop.models.tasks import STATE_ROLE, Column, TaskModel, branches
from plumbrule_desktop.plots.series import Numbers
from plumbrule_desktop.state.progress import Stopwatch

Warn = QAbstractItemModelTester.FailureReportingMode.Warning


@pytest.fixture
def model(qapp: object):
    model = TaskModel()
    tester = QAbstractItemModelTester(model, Warn)
    yield model
    del tester


def _tree(made: SimpleNamespace, *states: str):
    plan = made.plan_of(made.nitrogen())
    return branches(plan, made.state_of(plan, *states), Stopwatch(), 0.0)


def test_tasks_are_grouped_by_the_chain_of_their_species(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made))
    assert [model.index(row, 0).data() for row in range(model.rowCount())] == [
        "nitrogen \u00b7 cc-pVTZ",
        "N atom \u00b7 cc-pVTZ",
    ]
    first = model.index(0, 0)
    assert [model.index(row, 0, first).data() for row in range(4)] == ["HF", "MP2", "CCSD", "CCSD(T)"]
    assert model.index(2, 0, first).parent() == first


def test_only_the_rows_that_differ_are_announced(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made, "done", "running"))
    changed: list[tuple[int, int]] = []
    resets: list[bool] = []
    model.dataChanged.connect(lambda a, b: changed.append((a.parent().row(), a.row())))
    model.modelReset.connect(lambda: resets.append(True))
    model.show(_tree(made, "done", "done"))
    assert changed == [(-1, 0), (0, 1)]
    model.show(_tree(made, "done", "done"))
    assert len(changed) == 2
    assert resets == []


def test_another_plan_rebuilds_the_tree(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made))
    model.show(branches(Plan(), RunState(), Stopwatch(), 0.0))
    assert model.rowCount() == 0
    model.show(_tree(made))
    assert model.rowCount(model.index(1, 0)) == 4


def test_a_row_says_state_time_and_memory_against_the_forecast(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made, "done", "done", "died"))
    chain = model.index(0, 0)

    def cell(row: int, column: Column) -> str:
        return model.index(row, column, chain).data()

    assert cell(0, Column.STATE) == "done"
    assert cell(0, Column.TIME) == "2 s / 2 s"
    assert cell(0, Column.MEMORY) == "210 / 300 MB"
    assert cell(2, Column.STATE) == "died"
    assert cell(3, Column.TIME) == "\u2013 / 20 s"
    tip = model.index(2, 0, chain).data(Qt.ItemDataRole.ToolTipRole)
    assert "it continues from iteration 7" in tip
    assert chain.data(STATE_ROLE) == "died"


def test_a_row_is_spoken_with_species_method_state_and_share(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made, "done"))
    spoken = model.index(0, 0, model.index(0, 0)).data(Qt.ItemDataRole.AccessibleTextRole)
    assert spoken == "nitrogen: HF/cc-pVTZ, done, 100%"


def test_a_task_is_found_by_its_identity(made: SimpleNamespace, model: TaskModel):
    model.show(_tree(made))
    task = made.plan_of(made.nitrogen()).tasks[6]
    index = model.index_of(task.id)
    assert (index.parent().row(), index.row()) == (1, 2)
    assert not model.index_of("nobody").isValid()


def test_a_grid_grows_shrinks_and_changes_under_the_eyes_of_the_tester(qapp: object):
    grid = GridModel()
    tester = QAbstractItemModelTester(grid, Warn)
    inserted: list[tuple[int, int]] = []
    grid.rowsInserted.connect(lambda parent, first, last: inserted.append((first, last)))
    grid.show(Numbers(("a", "b"), (("1", "2"),)))
    grid.show(Numbers(("a", "b"), (("1", "3"), ("4", "5"), ("6", "7"))))
    assert inserted == [(1, 2)]
    assert grid.index(0, 1).data() == "3"
    grid.show(Numbers(("a", "b"), (("1", "3"),)))
    grid.show(Numbers(("a",), (("1",),)))
    assert (grid.rowCount(), grid.columnCount()) == (1, 1)
    assert grid.rowCount(QModelIndex()) == 1
    del tester


def test_a_reading_stands_beside_the_limit_and_the_finding_that_used_it(made: SimpleNamespace):
    table = readings_table(made.nitrogen(), made.judged())
    first = dict(zip(table.header, table.rows[0], strict=True))
    assert first["Reading"] == "T1"
    assert first["Limit"] == "0.02"
    assert first["What it means here"] == "One determinant describes nitrogen less well than usual"
    assert table.rows[1][1:4] == ("Orbitals are a minimum", "yes", "")


def test_a_reading_that_passed_shows_its_limit_as_well(made: SimpleNamespace):
    """T1 of a closed shell 0.02 (Lee and Taylor 1989), open 0.044 (Rienstra-Kiracofe et al. 2000)."""
    judgement = made.judged()
    readings = (Reading(name="T1", value=0.007), Reading(name="homo_lumo_gap", value=14.2, unit="eV"))
    both = tuple(one.model_copy(update={"readings": readings}) for one in judgement.species)
    quiet = judgement.model_copy(update={"findings": (), "species": both})
    rows = readings_table(made.nitrogen(), quiet).rows
    assert [(row[0], row[1][:3], row[3]) for row in rows] == [
        ("nitrogen", "T1", "0.02"),
        ("nitrogen", "Gap", "at least 5 eV"),
        ("N atom", "T1", "0.044"),
        ("N atom", "Gap", "at least 5 eV"),
    ]
    assert {row[4] for row in rows} == {""}


def test_occupations_show_those_that_say_something():
    assert value_words((2.0, 1.99, 1.93, 0.07, 0.001), "electrons") == "1.93, 0.07 electrons"
    assert value_words((2.0, 1.99, 0.01), "electrons") == "all within 0.02 of 0 or 2"
    assert value_words(True) == "yes"
    assert reading_name("share_of_something_new") == "share of something new"


def test_the_readings_of_a_task_are_listed_as_they_come():
    state = TaskState(task="x", readings=(Reading(name="D1", value=0.0313),))
    assert task_readings(state).rows == (("D1", "0.0313"),)


def test_a_depth_and_its_limit_are_both_in_the_unit_of_the_question(made: SimpleNamespace):
    # 0.02 hartree are 52.5 kJ/mol, the limit of 0.008 hartree 21.0 kJ/mol (CODATA 2022)
    judgement = made.judged()
    depth = (Reading(name="instability_depth", value=0.02, unit="hartree"),)
    deep = judgement.species[0].model_copy(update={"readings": depth})
    row = readings_table(
        made.nitrogen(), judgement.model_copy(update={"findings": (), "species": (deep,)})
    ).rows[0]
    assert all(words.endswith("kJ/mol") for words in row[2:4])
    assert [float(words.split()[0]) for words in row[2:4]] == pytest.approx([52.51, 21.00], abs=0.05)
