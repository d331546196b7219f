from types import SimpleNamespace

import pytest
from PySide6.QtCore import QPoint, QRect, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication, QLabel, QPushButton, QWidget

from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import Edit, Judgement, Verdict
from plumbrule_desktop import look
from plumbrule_desktop.findings_view import WORDS
from plumbrule_desktop.pages.judge import JudgePage


@pytest.fixture
def page(qtbot, desk, qapp: QApplication) -> JudgePage:
    look.wear(qapp, "light")
    page = JudgePage(desk)
    qtbot.addWidget(page)
    page.resize(1130, 680)
    with qtbot.waitExposed(page):
        page.show()
    return page


def _show(qtbot, page: JudgePage, desk, made: SimpleNamespace, level: str) -> None:
    desk.put(state=made.state_of(desk.plan, *["done"] * 8), judgement=made.judged(level))
    words = level.capitalize()
    qtbot.waitUntil(lambda: page.answer.isVisible() and page.answer.level.text() == words)


def test_before_a_run_the_page_says_what_will_stand_here_and_where_run_is(qtbot, page: JudgePage):
    qtbot.waitUntil(lambda: page.empty.text() == "No answer yet")
    assert "Press Run above" in page.empty_line.text()
    assert "Run" not in [button.text() for button in page.findChildren(QPushButton)]
    assert not page.answer.isVisible()


def test_an_unknown_verdict_without_numbers_is_no_answer(qtbot, page: JudgePage, desk):
    desk.put(judgement=Judgement(verdict=Verdict(level="unknown")))
    qtbot.waitUntil(lambda: page.empty.isVisible())
    assert not page.answer.isVisible()


def test_the_answer_stands_with_its_bar_its_verdict_and_the_accuracy_needed(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    assert page.answer.number.text() == "937 \u00b1 12 kJ/mol"
    assert page.answer.scale.has_bar
    assert page.answer.scale.isVisible()
    assert "accuracy needed 4 kJ/mol" in page.answer.scale.accessibleDescription()
    assert page.answer.target.text() == "This is wider than the 4 kJ/mol that you asked for."
    assert page.answer.headline.text() == "The basis set leaves the most open"
    assert "T1 of nitrogen" in page.answer.reasons.text()


def test_a_number_not_to_be_relied_on_is_struck_out_and_has_no_bar_anywhere(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "do not rely on it")
    assert page.answer.number.text() == "936.9 kJ/mol"
    assert page.answer.number.font().strikeOut()
    assert "struck out" in page.answer.number.accessibleName()
    assert not page.answer.scale.has_bar
    assert not page.answer.scale.isVisible()
    assert "not to be used" in page.answer.target.text()
    shown = [part.text() for part in page.findChildren(QLabel) if part.isVisible()]
    assert not [text for text in shown if "\u00b1" in text]
    assert "\u00b1" not in page.views.views[0].plot.accessibleDescription()


def test_the_number_stays_struck_out_when_the_colours_change(qtbot, qapp, page, desk, made):
    _show(qtbot, page, desk, made, "do not rely on it")
    look.wear(qapp, "dark")
    assert page.answer.number.font().strikeOut()
    colour = page.answer.level.palette().color(page.answer.level.foregroundRole()).name()
    assert colour == look.DARK.stop
    look.wear(qapp, "light")


def test_a_trusted_number_after_a_distrusted_one_is_no_longer_struck_out(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "do not rely on it")
    _show(qtbot, page, desk, made, "sound")
    assert not page.answer.number.font().strikeOut()
    assert page.answer.scale.has_bar


def test_a_partial_answer_says_so_far(qtbot, page, desk, made):
    desk.put(running=True, state=made.state_of(desk.plan, "done", "done", "running"), judgement=made.judged())
    qtbot.waitUntil(lambda: page.answer.partial.isVisible())
    assert page.answer.partial.text() == (
        "So far: 2 of 8 tasks are done. The run goes on and the answer may change."
    )


def test_findings_stand_gravest_first_with_their_limit_and_source(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "do not rely on it")
    assert [card.finding.severity for card in page.findings.cards] == ["stop", "care"]
    texts = [part.text() for part in page.findings.cards[0].findChildren(QLabel)]
    assert f"{WORDS['stop']} \u00b7 nitrogen" in texts
    assert "Largest doubles amplitude: 0.48; the limit is 0.2" in texts
    assert "T1: 0.024; the limit is 0.02 (Lee and Taylor 1989)" in [
        part.text() for part in page.findings.cards[1].findChildren(QLabel)
    ]


def test_every_view_can_be_reached_from_the_keyboard_and_only_one_is_seen(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    with qtbot.waitActive(page):
        page.activateWindow()
    page.views.tabs.setFocus()
    for place in range(1, 4):
        qtbot.keyClick(page.views.tabs, Qt.Key.Key_Right)
        assert [view.isVisible() for view in page.views.views] == [each == place for each in range(4)]


def test_the_readings_are_listed_with_limits_and_the_species_with_verdicts(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    page.views.turn_to(2)
    model = page.views.views[2].table.model()
    assert [model.index(0, column).data() for column in range(4)] == ["nitrogen", "T1", "0.024", "0.02"]
    page.views.turn_to(3)
    texts = [part.text() for part in page.views.views[3].findChildren(QLabel)]
    assert "Sound: One determinant describes it" in texts
    assert "HF: \u221254.40000000 hartree\nCCSD(T): \u221254.51000000 hartree" in texts


def test_a_changed_question_is_said_in_words_and_run_is_offered(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    assert not page.changed.isVisible()
    changed = edited(desk.brief, (Edit(path="recipe.basis", value=["cc-pVQZ"]),))
    desk.put(brief=changed)
    assert page.changed.isVisible()
    assert "basis: cc-pVTZ \u2192 cc-pVQZ" in page.changed.words.text()
    desk.put(brief=made.nitrogen())
    assert not page.changed.isVisible()


def test_what_has_to_be_computed_after_a_change_is_said_as_it_is(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    larger = edited(desk.brief, (Edit(path="recipe.basis", value=["cc-pVQZ"]),))
    desk.put(brief=larger, state=made.state_of(desk.plan))
    assert page.changed.words.text().endswith("Run it to see what that does to the answer.")
    settled = edited(made.nitrogen(), (Edit(path="question.within", value=64.0),))
    desk.put(brief=settled, state=made.state_of(desk.plan, *["done"] * 8))
    assert page.changed.words.text() == (
        "Changed: accuracy needed: 4 kJ/mol \u2192 64 kJ/mol. "
        "The answer is judged against the new need; nothing has to be computed."
    )


def test_a_question_that_never_had_an_answer_has_not_changed_any(qtbot, page, desk):
    desk.put(brief=edited(desk.brief, (Edit(path="recipe.basis", value=["cc-pVQZ"]),)))
    qtbot.waitUntil(lambda: page.empty.isVisible())
    assert not page.changed.isVisible()


def test_a_plot_without_data_is_not_shown_and_nothing_of_it_can_be_saved(qtbot, page, desk, made):
    known = made.judged()
    part = known.model_copy(update={"answer": None, "comparison": (), "budget": ()})
    desk.put(state=made.state_of(desk.plan, "done", "stopped"), judgement=part)
    qtbot.waitUntil(lambda: page.findings.isVisible())
    assert not page.views.views[0].panel.isVisible()
    page.views.turn_to(1)
    assert not page.views.views[1].panel.isVisible()
    _show(qtbot, page, desk, made, "take care")
    qtbot.waitUntil(lambda: page.views.views[1].panel.isVisible())


def test_the_buttons_of_a_finding_are_reached_by_tab(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    with qtbot.waitActive(page):
        page.activateWindow()
    page.views.tabs.setFocus()
    qtbot.waitUntil(page.views.tabs.hasFocus)
    met = []
    for _ in range(12):
        qtbot.keyClick(QApplication.focusWidget(), Qt.Key.Key_Tab)
        met.append(getattr(QApplication.focusWidget(), "text", str)())
    assert "Use the next larger basis" in met


def test_the_answer_is_copied_as_text(qtbot, page, desk, made):
    _show(qtbot, page, desk, made, "take care")
    with qtbot.waitSignal(desk.message):
        qtbot.mouseClick(page.copy, Qt.MouseButton.LeftButton)
    assert "937 +/- 12 kJ/mol" in QGuiApplication.clipboard().text()


@pytest.mark.parametrize("size", [(1130, 680), (740, 480), (560, 400)])
@pytest.mark.parametrize("level", ["take care", "do not rely on it"])
def test_nothing_overlaps_and_nothing_is_cut_at_any_width(qtbot, page, desk, made, size, level: str):
    page.resize(*size)
    _show(qtbot, page, desk, made, level)
    homes = (page.answer, *page.findings.cards)
    qtbot.waitUntil(lambda: [_crowded(home) for home in homes] == [[]] * len(homes), timeout=10_000)


def _crowded(home: QWidget) -> list[str]:
    """The words that are cut, stick out of their card, or lie over others."""
    parts = [part for part in home.findChildren(QLabel) + home.findChildren(QPushButton) if part.isVisible()]
    places = [QRect(part.mapTo(home, QPoint(0, 0)), part.size()) for part in parts]
    return [
        part.text()
        for at, (part, place) in enumerate(zip(parts, places, strict=True))
        if not home.rect().contains(place)
        or part.height() < min(part.sizeHint().height(), part.heightForWidth(part.width()) or 10**6)
        or any(place.intersects(other) for other in places[at + 1 :])
    ]
