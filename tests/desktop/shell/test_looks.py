import sys

import pytest
from PySide6.QtCore import QObject
from PySide6.QtGui import QColor
from PySide6.QtWidgets import QApplication, QPushButton

from plumbrule_core.documents.findings import Edit, Evidence, Finding, Judgement, Remedy, Verdict
from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_core.elements import ELEMENTS
from plumbrule_desktop import look
from plumbrule_desktop.actions import ROWS
from plumbrule_desktop.findings_view import FindingsView
from plumbrule_desktop.plumb_line import DEGREES, WORDS, PlumbLine
from plumbrule_desktop.scene.build import element_colours
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk


def luminance(colour: str) -> float:
    """Relative luminance (WCAG 2.2, definition)."""
    parts = [QColor(colour).redF(), QColor(colour).greenF(), QColor(colour).blueF()]
    r, g, b = (p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
    return 0.2126 * r + 0.7152 * g + 0.0722 * b


def contrast(first: str, second: str) -> float:
    """Contrast ratio (WCAG 2.2, definition)."""
    high, low = sorted((luminance(first), luminance(second)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.parametrize("scheme", [look.LIGHT, look.DARK], ids=["light", "dark"])
def test_every_text_can_be_read_on_every_ground(scheme: look.Colours) -> None:
    """4.5:1 for text (WCAG 2.2, success criterion 1.4.3)."""
    for ground in (scheme.window, scheme.surface):
        for text in (scheme.text, scheme.muted, scheme.accent, scheme.sound, scheme.care, scheme.stop):
            assert contrast(text, ground) >= 4.5, (text, ground)
    assert contrast(scheme.on_accent, scheme.accent) >= 4.5


@pytest.mark.parametrize("scheme", [look.LIGHT, look.DARK], ids=["light", "dark"])
def test_marks_and_phases_stand_out_from_every_ground(scheme: look.Colours) -> None:
    """3:1 for graphics (WCAG 2.2, success criterion 1.4.11)."""
    for ground in (scheme.window, scheme.surface):
        for mark in (scheme.unknown, *look.PHASES):
            assert contrast(mark, ground) >= 3.0, (mark, ground)


def test_every_element_has_a_colour_of_its_own_file() -> None:
    assert set(element_colours()) == set(ELEMENTS)


def test_the_scheme_can_be_changed_while_the_program_runs(qapp: QApplication) -> None:
    for scheme, colours in (("dark", look.DARK), ("light", look.LIGHT)):
        look.wear(qapp, scheme)
        assert look.colours() is colours


def test_nothing_is_given_away_for_a_call_that_returns_none() -> None:
    """Guards against the reference leak of PySide6 6.12 on Python 3.11 (measured by us)."""
    thing = QObject()
    before = sys.getrefcount(None)
    for _ in range(10_000):
        thing.setObjectName("a")
    assert abs(sys.getrefcount(None) - before) < 1000


def test_no_two_actions_share_a_shortcut_and_each_says_what_it_does() -> None:
    shortcuts = [str(row.shortcut) for row in ROWS if row.shortcut is not None]
    assert len(shortcuts) == len(set(shortcuts))
    assert all(row.tip for row in ROWS)
    assert len({row.key for row in ROWS}) == len(ROWS)


@pytest.mark.parametrize("level", list(DEGREES))
def test_the_plumb_line_says_by_its_lean_and_in_words_how_far_the_number_can_be_trusted(
    qtbot, desk: Desk, level: str
) -> None:
    line = PlumbLine(desk)
    qtbot.addWidget(line)
    line.show()
    desk._judgement = Judgement(verdict=Verdict(level=level, headline="A reason.", reasons=("First.",)))
    desk.judgement_changed.emit()
    assert line.bob.degrees == DEGREES[level]
    assert WORDS[level] in line.accessibleDescription()
    assert line.toolTip() == "First."


def test_without_a_verdict_the_plumb_line_says_how_much_is_done(qtbot, desk: Desk) -> None:
    line = PlumbLine(desk)
    qtbot.addWidget(line)
    assert line.words.text() == "Nothing known yet"
    states = ("done", "reused", "stopped", "waiting")
    desk._state = RunState(tasks={state: TaskState(task=state, state=state) for state in states})
    desk.run_changed.emit(frozenset())
    assert line.words.text() == "No answer yet, 2 of 4 done"


def test_the_worse_the_verdict_the_further_the_bob_hangs_from_upright() -> None:
    assert DEGREES["sound"] == 0 < DEGREES["take care"] < DEGREES["do not rely on it"] < 90


def test_findings_stand_with_the_gravest_first_and_their_remedy_is_one_press_away(qtbot) -> None:
    remedy = Remedy(label="Use cc-pVQZ", edits=(Edit(path="recipe.basis", value="cc-pVQZ"),))
    note = Finding(code="a", severity="note", headline="A note", consequence="Nothing.")
    stop = Finding(
        code="b",
        severity="stop",
        headline="A stop",
        consequence="Wrong by much.",
        evidence=(Evidence(reading="T1", value=0.031, threshold=0.02, source="Lee and Taylor 1989"),),
        remedies=(remedy, Remedy(label="Measure it")),
    )
    view = FindingsView("Nothing to say.")
    qtbot.addWidget(view)
    view.show_findings((note, stop))
    assert [card.finding for card in view.cards] == [stop, note]
    pressed: list[Remedy] = []
    view.remedy_chosen.connect(pressed.append)
    (button,) = view.cards[0].findChildren(QPushButton)
    button.click()
    assert pressed == [remedy]


def test_settings_survive_the_program_and_forget_casebooks_that_are_gone(tmp_path) -> None:
    first = Settings()
    for name in ("a.plumb", "b.plumb"):
        (tmp_path / name).touch()
        first.remember(tmp_path / name)
    first.scheme = "dark"
    first.sync()
    (tmp_path / "a.plumb").unlink()
    again = Settings()
    assert again.scheme == "dark"
    assert again.recent == (tmp_path / "b.plumb",)


def test_a_settings_file_full_of_nonsense_counts_as_empty(tmp_path, monkeypatch) -> None:
    path = tmp_path / "broken.ini"
    path.write_text("[General]\nscheme=@Invalid()\ngeometry=7\nrecent=@ByteArray(x)\n")
    monkeypatch.setenv("PLUMBRULE_SETTINGS", str(path))
    settings = Settings()
    assert settings.scheme == "system"
    assert settings.geometry is None
    assert settings.recent == ()
