"""The three pages over a real desk, a real casebook and a real run of H2."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Edit, Remedy
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_desktop.pages.judge import JudgePage
from plumbrule_desktop.pages.report import ReportPage
from plumbrule_desktop.pages.watch import WatchPage
from plumbrule_desktop.state.desk import Desk

HYDROGEN = Species(
    name="hydrogen",
    atoms=(Atom(symbol="H", x=0.0, y=0.0, z=0.0), Atom(symbol="H", x=0.0, y=0.0, z=0.7408481486)),
)
"""1.4 bohr apart, as in Szabo and Ostlund, Modern Quantum Chemistry (1989), sections 3.5.2 and 4.1."""
FULL_CI = -1.1373
"""Their full CI energy in the minimal basis: -1.1167 - 0.0206 hartree (from memory); CCSD is exact here."""
BRIEF = Brief(
    question=EnergyQuestion(within=0.001, unit="hartree"),
    species=(HYDROGEN,),
    recipe=Recipe(basis=("STO-3G",), rungs=("HF", "MP2", "CCSD"), core="all"),
)
WAIT_MS = 60_000


@pytest.fixture
def desk(qtbot) -> Iterator[Desk]:
    desk = Desk()
    with qtbot.waitSignal(desk.plan_changed, timeout=WAIT_MS):
        desk.new()
    with qtbot.waitSignal(desk.plan_changed, timeout=WAIT_MS, check_params_cb=None):
        desk.add_brief(BRIEF)
    qtbot.waitUntil(lambda: desk.plan is not None and len(desk.plan.tasks) == 3, timeout=WAIT_MS)
    yield desk
    qtbot.waitUntil(lambda: not desk.running, timeout=WAIT_MS)
    desk.close()


@pytest.mark.slow
def test_a_run_of_hydrogen_is_watched_judged_changed_undone_and_reported(qtbot, desk: Desk, tmp_path: Path):
    watch, judge, report = WatchPage(desk), JudgePage(desk), ReportPage(desk)
    for page in (watch, judge, report):
        qtbot.addWidget(page)
        page.resize(1130, 680)
        with qtbot.waitExposed(page):
            page.show()
    qtbot.waitUntil(lambda: watch.headline.text() == "Ready to run")

    qtbot.mouseClick(watch.button, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: watch.headline.text() == "All tasks are done", timeout=WAIT_MS)
    watch.choose(desk.plan.tasks[2].id)
    qtbot.waitUntil(lambda: watch.task.panel is not None and watch.task.panel.isVisible())

    qtbot.waitUntil(
        lambda: judge.answer.isVisible() and "CCSD" in judge.answer.standing.text(), timeout=WAIT_MS
    )
    assert desk.judgement.answer.value == pytest.approx(FULL_CI, abs=1e-4)
    assert judge.answer.number.text().startswith("\u22121.13")
    assert len(judge.views.views[0].plot.numbers().rows) == 3

    remedy = Remedy(label="Use a larger basis", edits=(Edit(path="recipe.basis", value=["6-31G"]),))
    judge.findings.remedy_chosen.emit(remedy)
    qtbot.waitUntil(lambda: judge.changed.isVisible())
    assert "basis: STO-3G \u2192 6-31G" in judge.changed.words.text()
    qtbot.waitUntil(lambda: judge.changed.undo.isEnabled(), timeout=WAIT_MS)
    qtbot.mouseClick(judge.changed.undo, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: desk.brief == BRIEF and not judge.changed.isVisible(), timeout=WAIT_MS)
    qtbot.waitUntil(lambda: desk.judgement is not None and desk.judgement.answer is not None, timeout=WAIT_MS)
    assert desk.judgement.answer.value == pytest.approx(FULL_CI, abs=1e-4)

    qtbot.waitUntil(lambda: "hydrogen" in report.browser.toPlainText(), timeout=WAIT_MS)
    report.export(tmp_path / "answer.csv")
    qtbot.waitUntil(lambda: report.went.isVisible(), timeout=WAIT_MS)
    assert "CCSD" in (tmp_path / "answer.csv").read_text()
