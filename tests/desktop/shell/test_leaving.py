"""Nothing that was made or computed is dropped without a question, and closing never hangs."""

import threading
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QMessageBox
from shiboken6 import isValid

from plumbrule_core.documents.species import Species
from plumbrule_core.errors import CasebookError
from plumbrule_core.session import Session
from plumbrule_desktop.state import asking, changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

LONG = 60_000


def settled(qtbot, desk: Desk) -> None:
    """Wait until everything that was asked of the clerk is answered."""
    done: list[bool] = []
    desk._clerk.do(lambda: None, lambda _: done.append(True))
    qtbot.waitUntil(lambda: bool(done) and desk.plan is not None, timeout=LONG)


def the_box(window: Window) -> QMessageBox | None:
    """The question on the screen."""
    boxes = [box for box in window.findChildren(QMessageBox) if box.isVisible()]
    return boxes[0] if boxes else None


def answer(window: Window, words: str) -> None:
    """Press the button of the question."""
    box = the_box(window)
    assert box is not None
    next(button for button in box.buttons() if button.text() == words).click()


@pytest.fixture
def with_water(qtbot, window: Window, water: Species) -> Window:
    """A window whose unsaved casebook holds water."""
    window.desk.add_species((water,), "Paste")
    settled(qtbot, window.desk)
    return window


def recent(window: Window, path: Path) -> None:
    window.settings.remember(path)
    window._fill_recent()
    window.recent_menu.actions()[0].trigger()


@pytest.mark.parametrize("way", ["new", "demo", "recent", "open", "invitation"])
def test_another_casebook_takes_an_unsaved_ones_place_only_where_the_person_agrees(
    qtbot, monkeypatch, with_water: Window, water: Species, tmp_path: Path, way: str
) -> None:
    window, other = with_water, tmp_path / "other.plumb"
    Session.open(other).close()
    monkeypatch.setattr("plumbrule_desktop.window.QFileDialog.getOpenFileName", lambda *_: (str(other), ""))
    ways: dict[str, Callable[[], object]] = {
        "new": window.actions_by_key["new"].trigger,
        "demo": window.actions_by_key["demo"].trigger,
        "open": window.actions_by_key["open"].trigger,
        "recent": lambda: recent(window, other),
        "invitation": lambda: window.pages["build"].molecule.invitation.demo.click(),  # type: ignore[attr-defined]
    }
    ways[way]()
    answer(window, "Cancel")
    settled(qtbot, window.desk)
    assert window.desk.brief.species == (water,)
    ways[way]()
    answer(window, "Go on without saving")
    qtbot.waitUntil(lambda: window.desk.brief.species != (water,), timeout=LONG)
    settled(qtbot, window.desk)
    assert window.desk.casebook.path == (other if way in ("open", "recent") else None)


def test_a_copy_is_saved_before_the_new_casebook_takes_its_place(
    qtbot, monkeypatch, with_water: Window, tmp_path: Path
) -> None:
    window, copy = with_water, tmp_path / "copy.plumb"
    monkeypatch.setattr("plumbrule_desktop.window.QFileDialog.getSaveFileName", lambda *_: (str(copy), ""))
    window.actions_by_key["new"].trigger()
    answer(window, "Save a copy\u2026")
    qtbot.waitUntil(lambda: window.desk.brief.species == (), timeout=LONG)
    assert window.desk.casebook.path is None
    session = Session.open(copy)
    assert [one.name for one in session.briefs()[0].brief.species] == ["water"]
    session.close()


def test_an_untouched_casebook_gives_its_place_without_a_question(qtbot, window: Window) -> None:
    window.actions_by_key["demo"].trigger()
    assert the_box(window) is None
    qtbot.waitUntil(lambda: len(window.desk.entries) >= 2, timeout=LONG)


def test_results_alone_in_an_unsaved_casebook_are_not_dropped_without_a_question(
    qtbot, window: Window, hydrogen: Species
) -> None:
    """As in the demo: there is nothing to undo, but something was computed."""
    desk = window.desk
    desk.add_species((hydrogen,), "Paste")
    desk.edit(asking.asked(desk.brief, "energy"), "Ask")
    desk.edit((*changes.set_recipe("basis", "STO-3G"), *changes.set_recipe("rungs", ["HF"])), "Recipe")
    assert desk._session is not None
    desk._clerk.do(desk._session.forget_history)
    desk._refresh()
    settled(qtbot, desk)
    assert desk.casebook.undo_label is None
    desk.run()
    qtbot.waitUntil(lambda: not desk.running, timeout=LONG)
    settled(qtbot, desk)
    assert not window.close()
    answer(window, "Cancel")
    window.actions_by_key["new"].trigger()
    answer(window, "Go on without saving")
    qtbot.waitUntil(lambda: desk.brief.species == (), timeout=LONG)
    settled(qtbot, desk)
    assert window.close()


def test_the_casebook_that_is_open_stays_open_for_writing_when_it_is_opened_again(
    qtbot, desk: Desk, water: Species, tmp_path: Path
) -> None:
    path = tmp_path / "mine.plumb"
    (tmp_path / "folder").mkdir()
    desk.open(path)
    desk.open(tmp_path / "folder" / ".." / "mine.plumb")
    settled(qtbot, desk)
    desk.add_question()
    qtbot.waitUntil(lambda: len(desk.entries) == 2, timeout=LONG)
    desk.add_species((water,), "Paste")
    chosen = desk.brief_id
    desk.open(path)
    settled(qtbot, desk)
    settled(qtbot, desk)
    assert not desk.casebook.read_only
    assert (desk.brief_id, desk.brief.species) == (chosen, (water,))


def test_an_unsaved_casebook_that_was_saved_is_written_on_in_that_file(
    qtbot, fresh_desk: Desk, water: Species, tmp_path: Path
) -> None:
    path = tmp_path / "mine.plumb"
    fresh_desk.save_copy(path)
    qtbot.waitUntil(lambda: fresh_desk.casebook.path == path, timeout=LONG)
    assert not fresh_desk.casebook.read_only
    assert not fresh_desk.unsaved_work
    assert fresh_desk.add_species((water,), "Paste") is None
    fresh_desk.close()
    session = Session.open(path)
    assert session.briefs()[0].brief.species == (water,)
    session.close()


def test_a_casebook_that_cannot_be_furnished_is_closed_again_and_the_old_one_stays(
    qtbot, monkeypatch, fresh_desk: Desk, water: Species, tmp_path: Path
) -> None:
    fresh_desk.add_species((water,), "Paste")
    settled(qtbot, fresh_desk)

    def full(*_: object) -> int:
        raise CasebookError("the disk is full")

    with monkeypatch.context() as broken:
        broken.setattr(Session, "add_brief", full)
        with qtbot.waitSignal(fresh_desk.message, timeout=LONG) as said:
            fresh_desk.open(tmp_path / "other.plumb")
    assert said.args == ["the disk is full", "error"]
    assert fresh_desk.brief.species == (water,)
    again = Session.open(tmp_path / "other.plumb")
    assert not again.read_only
    again.close()


@pytest.fixture
def stuck() -> Iterator[threading.Event]:
    """A job that waits for this event hangs until the test is over."""
    over = threading.Event()
    yield over
    over.set()
    for thread in threading.enumerate():
        if thread.name.startswith("plumbrule"):
            thread.join(10)


def test_a_job_that_never_ends_keeps_neither_the_window_nor_the_casebook_from_closing(
    qtbot, monkeypatch, desk: Desk, stuck: threading.Event, tmp_path: Path
) -> None:
    path = tmp_path / "mine.plumb"
    desk.open(path)
    settled(qtbot, desk)
    monkeypatch.setattr("plumbrule_desktop.state.desk.CLOSE_SECONDS", 0.2)
    monkeypatch.setattr("plumbrule_desktop.state.desk.SHUT_SECONDS", 1.0)
    begun = threading.Event()
    desk._clerk.do(lambda: (begun.set(), stuck.wait(60)))
    assert begun.wait(10)
    dropped: list[bool] = []
    desk._clerk.do(lambda: dropped.append(True))
    before = time.monotonic()
    desk.close()
    assert time.monotonic() - before < 5
    again = Session.open(path)
    assert not again.read_only, "the first session was closed although its clerk hangs"
    again.close()
    stuck.set()
    thread = desk._clerk._thread
    assert thread is not None
    thread.join(10)
    assert not thread.is_alive()
    assert dropped == []


def test_a_task_that_failed_is_named_before_its_reason(qtbot, window: Window, hydrogen: Species) -> None:
    from plumbrule_core.documents.events import Failed

    desk = window.desk
    desk.add_species((hydrogen,), "Paste")
    desk.edit(asking.asked(desk.brief, "energy"), "Ask")
    desk.edit((*changes.set_recipe("basis", "STO-3G"), *changes.set_recipe("rungs", ["HF"])), "Recipe")
    settled(qtbot, desk)
    desk.run()
    task = desk.plan.tasks[0]  # type: ignore[union-attr]
    qtbot.waitUntil(lambda: bool(desk._labels), timeout=LONG)
    said: list[str] = []
    desk.message.connect(lambda text, _: said.append(text))
    desk._on_event(Failed(task=task.id, seq=10_000, reason="It did not converge"))
    qtbot.waitUntil(lambda: not desk.running, timeout=LONG)
    assert f"{task.label}: It did not converge" in said


def test_a_disk_that_fails_at_the_end_of_a_run_is_said(qtbot, fresh_desk: Desk) -> None:
    class Broken:
        """A run that its disk broke."""

        running, outcome = False, "failed"

        def stop(self) -> None:
            """It has ended."""

        def wait(self, timeout: float | None = None) -> bool:
            raise OSError(28, "No space left on device")

    fresh_desk._started(Broken())  # type: ignore[arg-type]
    with qtbot.waitSignal(fresh_desk.message, timeout=LONG) as said:
        pass
    assert "No space left" in said.args[0]
    assert not fresh_desk.running


def test_a_window_that_waits_for_its_casebook_is_out_of_sight(qtbot, monkeypatch, window: Window) -> None:
    seen: list[bool] = []
    close = window.desk.close
    monkeypatch.setattr(window.desk, "close", lambda: (seen.append(window.isVisible()), close()))
    window.leave()
    assert seen == [False]
    assert not isValid(window) or not window.isVisible()
    assert Qt.WindowType.Window in window.windowFlags()
