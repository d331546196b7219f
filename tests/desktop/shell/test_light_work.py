"""The window's thread does little: it imports nothing long, and does nothing twice."""

import sys
import threading
from collections.abc import Callable

import pytest
from PySide6.QtWidgets import QPushButton, QWidget

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.species import Species
from plumbrule_desktop import page_stack
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.flow import FlowLayout
from plumbrule_desktop.window import Window


def test_what_the_pages_need_is_imported_in_a_thread_of_their_own(
    qtbot, monkeypatch, open_window: Callable[..., Window]
) -> None:
    fetched: dict[str, str] = {}
    plain = page_stack.import_module

    def import_seen(name: str) -> object:
        fetched.setdefault(name, threading.current_thread().name)
        return plain(name)

    monkeypatch.setattr(page_stack, "import_module", import_seen)
    window = open_window()
    assert list(window.pages) == list(page_stack.PAGES)
    assert set(fetched.values()) == {"plumbrule-pages"}
    assert set(fetched) <= set(sys.modules)


def test_a_page_that_is_wanted_before_its_turn_is_made_at_once_and_the_casebook_still_opens(
    qtbot, open_window: Callable[..., Window]
) -> None:
    def begin(desk: Desk) -> None:
        begun.append(desk)
        desk.new()

    begun: list[Desk] = []
    plain = Window.show

    def show_and_turn(window: Window) -> None:
        plain(window)
        window.show_page(2)
        window.show_page(3)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Window, "show", show_and_turn)
        window = open_window(begin)
    assert begun == [window.desk]
    assert window.stack.currentWidget() is window.pages["report"]


def test_the_faults_of_a_question_are_worked_out_once(
    qtbot, monkeypatch, fresh_desk: Desk, water: Species
) -> None:
    counted: list[Brief] = []
    plain = Brief.faults
    monkeypatch.setattr(Brief, "faults", lambda brief: (counted.append(brief), plain(brief))[1])
    fresh_desk.add_species((water,), "Paste")
    counted.clear()
    shown = fresh_desk.faults
    assert [fresh_desk.faults for _ in range(5)] == [shown] * 5
    assert len(counted) <= 1
    fresh_desk.edit((), "Nothing")
    fresh_desk.add_species((water.model_copy(update={"charge": 1}),), "Paste a wrong one")
    assert fresh_desk.faults != shown


def test_a_flow_is_as_high_as_its_lines_also_after_a_widget_came_or_grew(qtbot) -> None:
    home = QWidget()
    qtbot.addWidget(home)
    flow = FlowLayout(home, spacing=6)
    buttons = [QPushButton("One button") for _ in range(2)]
    flow.addWidget(buttons[0])
    wide, high = buttons[0].sizeHint().width(), buttons[0].sizeHint().height()
    room = 2 * wide + 6
    assert flow.heightForWidth(room) == high
    flow.addWidget(buttons[1])
    assert flow.heightForWidth(room) == high
    buttons[1].setText("One button with more to say")
    assert flow.heightForWidth(room) == 2 * high + 6
