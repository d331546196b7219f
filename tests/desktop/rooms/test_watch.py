from types import SimpleNamespace

import pytest
from PySide6.QtCore import Qt

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.run_state import RunState
from plumbrule_desktop.pages.watch import WatchPage


@pytest.fixture
def page(qtbot, desk) -> WatchPage:
    page = WatchPage(desk)
    qtbot.addWidget(page)
    page.resize(1130, 680)
    with qtbot.waitExposed(page):
        page.show()
    qtbot.waitUntil(lambda: bool(page.headline.text()))
    return page


def _ids(desk) -> list[str]:
    return [task.id for task in desk.plan.tasks]


def test_before_the_run_the_page_says_what_will_run_and_how_long(page: WatchPage):
    assert page.headline.text() == "Ready to run"
    assert page.line.text() == "8 tasks on 2 species: about 44 s, 300 MB."
    assert page.button.text() == "Run"
    assert page.model.rowCount() == 2


def test_run_starts_the_run_and_stop_stops_it(
    qtbot, page: WatchPage, desk, made: SimpleNamespace, monkeypatch
):
    called: list[str] = []
    monkeypatch.setattr(type(desk), "run", lambda self: called.append("run"))
    monkeypatch.setattr(type(desk), "stop", lambda self: called.append("stop"))
    qtbot.mouseClick(page.button, Qt.MouseButton.LeftButton)
    desk.put(running=True, state=made.state_of(desk.plan, "running"))
    qtbot.waitUntil(lambda: page.button.text() == "Stop")
    qtbot.mouseClick(page.button, Qt.MouseButton.LeftButton)
    assert called == ["run", "stop"]


def test_the_running_task_is_followed_until_another_is_chosen(qtbot, page: WatchPage, desk, made):
    desk.put(running=True, state=made.state_of(desk.plan, "done", "done", "running"))
    qtbot.waitUntil(lambda: page.task.title.text() == "nitrogen: CCSD/cc-pVTZ")
    assert page.task.state.text() == "Running: iteration 7"
    with qtbot.waitActive(page):
        page.activateWindow()
    page.list.setFocus()
    qtbot.keyClick(page.list, Qt.Key.Key_Up)
    assert not page.follow.isChecked()
    assert page.task.title.text() == "nitrogen: MP2/cc-pVTZ"
    desk.put(running=True, state=made.state_of(desk.plan, "done", "done", "done", "running"))
    qtbot.waitUntil(lambda: "3 of 8" in page.line.text())
    assert page.task.title.text() == "nitrogen: MP2/cc-pVTZ"
    page.follow.setChecked(True)
    qtbot.waitUntil(lambda: page.task.title.text() == "nitrogen: CCSD(T)/cc-pVTZ")


def test_a_died_task_says_why_and_what_to_do(qtbot, page: WatchPage, desk, made):
    desk.put(state=made.state_of(desk.plan, "done", "done", "died"))
    page.choose(_ids(desk)[2])
    qtbot.waitUntil(lambda: page.task.trouble.isVisible())
    assert "killed by signal 9" in page.task.trouble.text()
    assert "Press Run to carry on; it continues from iteration 7." in page.task.trouble.text()
    qtbot.waitUntil(lambda: page.headline.text() == "1 task did not finish")
    assert page.button.text() == "Run"


def test_the_chosen_task_shows_its_curves_its_log_and_its_readings(qtbot, page: WatchPage, desk, made):
    desk.put(state=made.state_of(desk.plan, "done", "done", "done"))
    page.choose(_ids(desk)[2])
    qtbot.waitUntil(lambda: page.task.panel is not None and page.task.panel.isVisible())
    assert page.task.panel.plot.accessibleDescription().startswith("12 iterations")
    assert page.task.log.toPlainText() == "22 orbitals are correlated, 2 are frozen."
    assert page.task.readings.model().index(0, 1).data() == "0.0131"
    page.choose(_ids(desk)[1])
    qtbot.waitUntil(lambda: page.task.title.text() == "nitrogen: MP2/cc-pVTZ")
    assert not page.task.panel.isVisible()


def test_log_lines_are_appended_and_never_doubled(qtbot, page: WatchPage, desk, made):
    state = made.state_of(desk.plan, "running")
    key = _ids(desk)[0]
    for count in (1, 2, 3):
        lines = tuple(f"line {n}" for n in range(count))
        moved = RunState(tasks={**state.tasks, key: state.tasks[key].model_copy(update={"log": lines})})
        desk.put(running=True, state=moved)
        page.task.show_task(desk.plan.tasks[0], moved.tasks[key], None)
    assert page.task.log.toPlainText() == "line 0\nline 1\nline 2"


def test_when_all_is_done_the_page_leads_on_to_the_judgement(qtbot, page: WatchPage, desk, made):
    desk.put(state=made.state_of(desk.plan, *["done"] * 8))
    qtbot.waitUntil(lambda: page.headline.text() == "All tasks are done")
    with qtbot.waitSignal(page.page_wanted) as asked:
        qtbot.mouseClick(page.button, Qt.MouseButton.LeftButton)
    assert asked.args == ["judge"]


def test_a_question_that_cannot_run_says_every_fault_and_offers_no_run(qtbot, page: WatchPage, desk):
    desk.put(brief=Brief(), plan=Plan(), state=RunState())
    qtbot.waitUntil(lambda: page.headline.text() == "This question cannot be run yet")
    assert "No question is asked yet." in page.line.text()
    assert "question:" not in page.line.text()
    assert not page.button.isVisible()
    assert not page.list.isVisible()


def test_a_narrow_page_puts_the_task_under_the_list(qtbot, page: WatchPage, desk, made):
    assert page.splitter.orientation() == Qt.Orientation.Horizontal
    page.resize(740, 480)
    qtbot.waitUntil(lambda: page.splitter.orientation() == Qt.Orientation.Vertical)
    assert page.list.height() >= 170


def test_nothing_is_redrawn_while_the_page_is_hidden(qtbot, page: WatchPage, desk, made):
    page.hide()
    desk.put(running=True, state=made.state_of(desk.plan, "done", "done", "running"))
    qtbot.wait(150)
    assert page.headline.text() == "Ready to run"
    page.show()
    qtbot.waitUntil(lambda: page.headline.text() == "Running")
