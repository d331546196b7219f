"""The real window, driven as a person drives it."""

import sqlite3
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

import pytest
from PySide6.QtCore import QCoreApplication, QEvent, QMimeData, Qt, QUrl
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication, QMessageBox, QPushButton

from plumbrule_core.documents.findings import Finding, Remedy
from plumbrule_core.documents.species import Species
from plumbrule_desktop import look
from plumbrule_desktop.findings_view import FindingsView
from plumbrule_desktop.page_stack import PAGES
from plumbrule_desktop.pages.build.ladder import FUNCTIONALS, SPACES
from plumbrule_desktop.pages.build.page import BuildPage
from plumbrule_desktop.scene.three_d import YES
from plumbrule_desktop.state import asking, changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

LONG = 60_000
WATER = "3\nwater\nO 0 0 0.117\nH 0 0.757 -0.469\nH 0 -0.757 -0.469\n"


def build_page(window: Window) -> BuildPage:
    page = window.pages["build"]
    assert isinstance(page, BuildPage)
    return page


def settled(qtbot, window: Window) -> None:
    """Wait until everything is known of the chosen question."""
    done: list[bool] = []
    window.desk._clerk.do(lambda: None, lambda _: done.append(True))
    qtbot.waitUntil(lambda: bool(done) and window.desk.plan is not None, timeout=LONG)


@pytest.fixture
def with_water(qtbot, window: Window, water: Species) -> Window:
    """A window that holds water."""
    window.desk.add_species((water,), "Paste")
    settled(qtbot, window)
    return window


def test_the_first_window_invites_and_offers_the_demo(qtbot, window: Window) -> None:
    page = build_page(window)
    assert page.molecule.invitation.isVisible()
    assert not window.question_line.button.isEnabled()
    qtbot.mouseClick(page.molecule.invitation.demo, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: len(window.desk.entries) >= 2 and bool(window.desk.brief.species), timeout=LONG)
    settled(qtbot, window)
    assert not page.molecule.invitation.isVisible()
    assert len(page.species.cards) == len(window.desk.brief.species)
    assert window.question_line.button.isEnabled()
    assert " s, " in window.question_line.forecast.text() or " min, " in window.question_line.forecast.text()


def test_a_molecule_pasted_by_the_keyboard_becomes_a_card_and_a_picture(qtbot, window: Window) -> None:
    QGuiApplication.clipboard().setText(WATER)
    window.centralWidget().setFocus()
    with qtbot.waitActive(window):
        window.activateWindow()
    qtbot.keyClick(window, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    qtbot.waitUntil(lambda: len(window.desk.brief.species) == 1, timeout=LONG)
    page = build_page(window)
    (card,) = page.species.cards
    assert "H2O" in card.formula.text()
    assert card.words.text() == "singlet, no unpaired electron"
    assert page.molecule.stack.currentIndex() == 1
    assert "H2O" in page.molecule.view.accessibleName()


def test_smiles_become_a_card(qtbot, window: Window) -> None:
    page = build_page(window)
    page.species.smiles.setText("NN")
    qtbot.keyClick(page.species.smiles, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: len(window.desk.brief.species) == 1, timeout=LONG)
    assert window.desk.brief.species[0].formula == "H4N2"


def test_a_dropped_file_becomes_a_card_and_an_unreadable_one_a_message(
    qtbot, window: Window, tmp_path: Path
) -> None:
    good, bad = tmp_path / "water.xyz", tmp_path / "broken.xyz"
    good.write_text(WATER)
    bad.write_text("3\n\nO 0 0\n")
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(good)), QUrl.fromLocalFile(str(bad))])
    build_page(window).intake.take(data)
    qtbot.waitUntil(lambda: len(window.desk.brief.species) == 1, timeout=LONG)
    qtbot.waitUntil(lambda: bool(window.banner.texts), timeout=LONG)
    assert "broken.xyz" in window.banner.texts[0] or "line" in window.banner.texts[0]


def test_a_message_goes_with_the_next_thing_that_is_done(qtbot, with_water: Window) -> None:
    window = with_water
    for act in (
        lambda: build_page(window).intake.text("N", "Paste a molecule"),
        lambda: window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask"),
        window.actions_by_key["undo"].trigger,
    ):
        build_page(window).intake.text("no molecule at all", "Paste a molecule")
        qtbot.waitUntil(lambda: bool(window.banner.texts), timeout=LONG)
        act()
        settled(qtbot, window)
        qtbot.waitUntil(lambda: not window.banner.texts, timeout=LONG)


def test_the_message_about_one_file_outlives_the_others_that_came_with_it(
    qtbot, window: Window, tmp_path: Path
) -> None:
    good, bad = tmp_path / "water.xyz", tmp_path / "broken.xyz"
    good.write_text(WATER)
    bad.write_text("3\n\nO 0 0\n")
    build_page(window).intake.files([bad, good])
    qtbot.waitUntil(lambda: len(window.desk.brief.species) == 1, timeout=LONG)
    settled(qtbot, window)
    assert len(window.banner.texts) == 1


@pytest.mark.parametrize("title", [FUNCTIONALS, SPACES])
def test_what_few_need_is_folded_away_until_it_is_wanted(qtbot, with_water: Window, title: str) -> None:
    ladder = build_page(with_water).recipe.ladder
    folded = ladder.folded[title]
    assert ladder.cards["CCSD(T)"].isVisible()
    first = next(card for name, card in ladder.cards.items() if folded.isAncestorOf(card))
    assert folded.isVisible()
    assert not first.isVisible()
    folded.button.setFocus()
    qtbot.keyClick(folded.button, Qt.Key.Key_Space)
    assert first.isVisible()
    first.box.click()
    assert folded.button.text() == f"{title} (1 chosen)"


def test_a_wrong_multiplicity_is_said_beside_its_field_and_right_again_after_undo(
    qtbot, with_water: Window
) -> None:
    window = with_water
    (card,) = build_page(window).species.cards
    card.multiplicity.setValue(2)
    assert card.words.text() == "doublet, 1 unpaired electron"
    assert "must be odd" in card.faults["multiplicity"].text()
    assert card.faults["multiplicity"].isVisible()
    assert card.multiplicity.property("faulty") == "true"
    assert not window.question_line.button.isEnabled()
    settled(qtbot, window)
    undo = window.actions_by_key["undo"]
    assert "Change the multiplicity of water" in undo.text()
    undo.trigger()
    qtbot.waitUntil(lambda: card.multiplicity.value() == 1, timeout=LONG)
    assert not card.faults["multiplicity"].isVisible()


def test_typing_in_a_card_keeps_the_keyboard_in_its_field(qtbot, with_water: Window) -> None:
    (card,) = build_page(with_water).species.cards
    with qtbot.waitActive(with_water):
        with_water.activateWindow()
    card.charge.setFocus()
    qtbot.keyClick(card.charge, Qt.Key.Key_Up)
    qtbot.keyClick(card.charge, Qt.Key.Key_Up)
    settled(qtbot, with_water)
    assert with_water.desk.brief.species[0].charge == 2
    assert build_page(with_water).species.cards == [card]
    assert QApplication.focusWidget() is card.charge


def test_pages_are_switched_by_the_keyboard(qtbot, window: Window) -> None:
    with qtbot.waitActive(window):
        window.activateWindow()
    keys = (Qt.Key.Key_2, Qt.Key.Key_3, Qt.Key.Key_4, Qt.Key.Key_1)
    for key, place in zip(keys, (1, 2, 3, 0), strict=True):
        qtbot.keyClick(window, key, Qt.KeyboardModifier.ControlModifier)
        assert window.stack.currentIndex() == place
        assert window.segments.current == place
        assert window.stack.currentWidget() is window.pages[PAGES[place]]


def test_tab_comes_to_the_page_that_is_shown_and_the_arrows_go_on(qtbot, window: Window) -> None:
    with qtbot.waitActive(window):
        window.activateWindow()
    window.show_page(2)
    reached = [window.segments.button(place) for place in range(4)]
    by_tab = [button.text() for button in reached if button.focusPolicy() & Qt.FocusPolicy.TabFocus]
    assert by_tab == ["Judge"]
    reached[2].setFocus()
    qtbot.keyClick(reached[2], Qt.Key.Key_Right)
    assert window.stack.currentIndex() == 3
    assert QApplication.focusWidget() is reached[3]


def test_tab_goes_through_the_question_line_as_it_is_read(qtbot, with_water: Window) -> None:
    window = with_water
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    settled(qtbot, window)
    with qtbot.waitActive(window):
        window.activateWindow()
    line = window.question_line
    line.chooser.setFocus()
    for wanted in (*line.sentence.clauses.values(), line.button):
        qtbot.keyClick(QApplication.focusWidget(), Qt.Key.Key_Tab)
        assert QApplication.focusWidget() is wanted


def test_the_question_is_asked_and_changed_through_its_underlined_words(
    qtbot, window: Window, hydrazine: Species
) -> None:
    window.desk.add_species((hydrazine,), "Paste")
    sentence = window.question_line.sentence
    assert list(sentence.clauses) == ["kind"]
    popup = sentence.open_editor("kind")
    buttons = {button.text(): button for button in popup.findChildren(QPushButton)}
    buttons["Bond energy"].click()
    assert list(sentence.clauses) == ["kind", "cut", "species", "within"]
    popup = sentence.open_editor("within")
    popup.value.setValue(0.2)
    popup.unit.setCurrentText("eV")
    popup.findChildren(QPushButton)[-1].click()
    assert (window.desk.brief.question.within, window.desk.brief.question.unit) == (0.2, "eV")
    popup = sentence.open_editor("cut")
    popup.bonds.setCurrentIndex(popup.bonds.count() - 1)
    popup.findChildren(QPushButton)[0].click()
    assert window.desk.brief.question.cut != (1, 2)
    assert window.desk.brief.question.faults(window.desk.brief.by_name) == ()


def test_a_reaction_out_of_balance_is_said_while_its_coefficients_are_typed(
    qtbot, window: Window, water: Species, hydrogen: Species
) -> None:
    window.desk.add_species((water, hydrogen), "Paste")
    window.desk.edit(asking.asked(window.desk.brief, "reaction"), "Ask")
    popup = window.question_line.sentence.open_editor("terms")
    assert "does not balance" in popup.balance.text()
    popup.boxes["water"].setValue(0)
    popup.boxes["dihydrogen"].setValue(-1)
    popup.close()
    assert "does not balance" in window.question_line.trouble.text()


def test_two_picked_atoms_that_are_bonded_offer_their_bond_as_the_question(
    qtbot, window: Window, hydrazine: Species
) -> None:
    window.desk.add_species((hydrazine,), "Paste")
    panel = build_page(window).molecule
    panel.view._choose((0, 1))
    assert panel.cut.isVisible()
    panel.cut.click()
    assert window.desk.brief.question.cut == (1, 2)
    panel.view._choose((2, 4))
    assert not panel.cut.isVisible()
    assert "apart" in panel.says.text()


def test_the_ladder_shows_what_each_rung_costs_and_the_last_rung_stays(qtbot, with_water: Window) -> None:
    window = with_water
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    settled(qtbot, window)
    ladder = build_page(window).recipe.ladder
    assert ladder.cards["CCSD(T)"].cost.text()
    for name in ("CCSD(T)", "CCSD", "MP2", "HF"):
        ladder.cards[name].box.click()
    assert window.desk.brief.recipe.rungs == ("HF",)
    assert ladder.cards["HF"].box.isChecked()
    assert "at least one rung" in window.banner.texts[-1]


def test_the_recipe_is_changed_in_plain_words_and_its_faults_stand_at_its_fields(
    qtbot, with_water: Window
) -> None:
    window, recipe = with_water, build_page(with_water).recipe
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    recipe.combos["core"].setCurrentIndex(1)
    recipe.combos["core"].activated.emit(1)
    assert window.desk.brief.recipe.core == "all"
    recipe.pair.setCurrentIndex(1)
    recipe.pair.activated.emit(1)
    assert window.desk.brief.recipe.basis == ("cc-pVTZ", "cc-pVQZ")
    window.desk.edit(changes.set_recipe("basis", "no-such-basis"), "Wrong basis")
    settled(qtbot, window)
    assert recipe.fields["basis"].fault.isVisible()
    assert "no-such-basis" in recipe.fields["basis"].fault.text()
    assert "no-such-basis" in window.question_line.trouble.text()


def test_a_run_goes_from_the_button_to_a_verdict_on_the_plumb_line(
    qtbot, window: Window, hydrogen: Species
) -> None:
    window.desk.add_species((hydrogen,), "Paste")
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    edits = (*changes.set_recipe("basis", "STO-3G"), *changes.set_recipe("rungs", ["HF", "MP2"]))
    window.desk.edit(edits, "Recipe")
    settled(qtbot, window)
    button = window.question_line.button
    assert button.text() == "Run"
    qtbot.mouseClick(button, Qt.MouseButton.LeftButton)
    assert button.text() == "Stop"
    qtbot.waitUntil(lambda: not window.desk.running, timeout=LONG)
    settled(qtbot, window)
    assert window.banner.texts == ("The run is done.",)
    qtbot.waitUntil(lambda: bool(window.plumb_line.answer.text()), timeout=LONG)
    assert button.text() == "Run"
    assert window.question_line.forecast.text() == "all answered"
    assert not button.isEnabled()
    assert window.plumb_line.words.text() != "Nothing known yet"
    assert window.plumb_line.accessibleDescription().startswith(window.plumb_line.words.text())


def test_a_window_closed_during_a_run_asks_stops_and_waits(qtbot, window: Window, hydrogen: Species) -> None:
    window.desk.add_species((hydrogen,), "Paste")
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    window.desk.edit(changes.set_recipe("basis", "STO-3G"), "Recipe")
    settled(qtbot, window)
    window.desk.run()
    assert not window.close()
    (box,) = window.findChildren(QMessageBox)
    stop = next(button for button in box.buttons() if button.text() == "Stop and close")
    stop.click()
    qtbot.waitUntil(lambda: not window.desk.running, timeout=LONG)
    texts = lambda: [box.text() for box in window.findChildren(QMessageBox)]  # noqa: E731
    qtbot.waitUntil(lambda: "This casebook is not saved." in texts(), timeout=LONG)
    assert window.isVisible()


def test_an_unsaved_casebook_is_not_dropped_without_a_question(qtbot, with_water: Window) -> None:
    assert not with_water.close()
    (box,) = with_water.findChildren(QMessageBox)
    assert "not saved" in box.text()
    assert with_water.isVisible()
    box.reject()


def test_an_untouched_casebook_closes_without_a_question(qtbot, window: Window) -> None:
    assert window.close()


def test_a_saved_casebook_closes_without_a_question_and_holds_all_that_was_done(
    qtbot, open_window: Callable[..., Window], water: Species, tmp_path: Path
) -> None:
    path = tmp_path / "mine.plumb"
    window = open_window(lambda desk: desk.open(path))
    window.desk.add_species((water,), "Paste")
    assert window.close()
    again = open_window(lambda desk: desk.open(path))
    assert again.desk.brief.species == (water,)
    assert not again.desk.casebook.read_only


def test_a_closed_window_leaves_no_window_no_picture_and_no_thread_behind(
    qtbot, open_window: Callable[..., Window], water: Species
) -> None:
    before = set(QApplication.topLevelWidgets())
    for _ in range(3):
        window = open_window()
        window.desk.add_species((water,), "Paste")
        qtbot.waitUntil(lambda window=window: window.three_d.answer is not None, timeout=LONG)
        view = build_page(window).molecule.view
        window.leave()
        assert not view.three_d
        window.deleteLater()
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    left = [widget for widget in set(QApplication.topLevelWidgets()) - before if isinstance(widget, Window)]
    assert left == []


def test_a_damaged_question_is_said_above_the_pages(
    qtbot, open_window: Callable[..., Window], water: Species, tmp_path: Path
) -> None:
    path = tmp_path / "hurt.plumb"
    desk = open_window(lambda desk: desk.open(path))
    desk.desk.add_species((water,), "Paste")
    desk.desk.add_question()
    qtbot.waitUntil(lambda: len(desk.desk.entries) == 2, timeout=LONG)
    assert desk.close()
    with closing(sqlite3.connect(path)) as db, db:
        db.execute("UPDATE briefs SET document = 'x' WHERE id = (SELECT min(id) FROM briefs)")
    hurt = open_window(lambda desk: desk.open(path))
    assert any("damaged" in text for text in hurt.banner.texts)
    assert len(hurt.desk.entries) == 1


def test_a_read_only_casebook_says_so_and_blocks_its_controls(
    qtbot, open_window: Callable[..., Window], water: Species, tmp_path: Path
) -> None:
    path = tmp_path / "shared.plumb"
    first = open_window(lambda desk: desk.open(path))
    first.desk.add_species((water,), "Paste")
    settled(qtbot, first)
    second = open_window(lambda desk: desk.open(path))
    assert second.desk.casebook.why_read_only in second.banner.texts
    (card,) = build_page(second).species.cards
    assert card.charge.isReadOnly()
    assert not second.actions_by_key["paste"].isEnabled()
    assert not second.question_line.button.isEnabled()


def test_where_3d_cannot_be_drawn_a_plain_picture_says_why(qtbot, with_water: Window) -> None:
    panel = build_page(with_water).molecule
    panel.view.close_picture()
    panel._three_d_known("there is no OpenGL that works")
    assert panel.why_flat.isVisible()
    assert "no OpenGL" in panel.why_flat.text()
    assert not panel.view.grab().isNull()


def test_where_3d_can_be_drawn_it_is(qtbot, with_water: Window) -> None:
    qtbot.waitUntil(lambda: with_water.three_d.answer is not None, timeout=LONG)
    assert build_page(with_water).molecule.view.three_d == (with_water.three_d.answer == YES)


def test_the_colours_are_chosen_in_the_menu_and_remembered(qtbot, window: Window) -> None:
    window.actions_by_key["dark"].trigger()
    assert look.colours(window) is look.DARK
    assert window.settings.scheme == "dark"
    window.actions_by_key["light"].trigger()
    assert look.colours(window) is look.LIGHT


def test_every_control_that_can_be_reached_by_tab_has_a_name(qtbot, with_water: Window) -> None:
    nameless = []
    widget = with_water.nextInFocusChain()
    while widget is not None and widget is not with_water:
        reachable = bool(widget.focusPolicy() & Qt.FocusPolicy.TabFocus) and widget.isVisibleTo(with_water)
        if reachable and with_water.stack.currentIndex() == 0:
            text = getattr(widget, "text", lambda: "")()
            if not (widget.accessibleName() or text):
                nameless.append(type(widget).__name__)
        widget = widget.nextInFocusChain()
    assert nameless == []


def test_opening_a_saved_casebook_puts_it_among_the_recent_ones(
    qtbot, open_window: Callable[..., Window], tmp_path: Path
) -> None:
    path = tmp_path / "mine.plumb"
    window = open_window(lambda desk: desk.open(path))
    assert window.windowTitle().startswith("mine.plumb")
    assert window.settings.recent == (path,)
    window._fill_recent()
    assert window.recent_menu.actions()[0].text() == "mine.plumb"


def test_the_demo_opens_from_the_command_line(qtbot, open_window: Callable[..., Window]) -> None:
    window = open_window(Desk.open_demo)
    assert len(window.desk.entries) >= 2
    assert window.desk.casebook.undo_label is None


def test_a_long_remedy_wraps_so_that_its_card_fits_the_narrowest_column(qtbot):
    label = "Add an active space, NEVPT2 and TCCSD(T), and run"
    finding = Finding(
        code="x",
        severity="care",
        headline="h",
        consequence="c",
        remedies=(Remedy(label=label, then_run=True),),
    )
    view = FindingsView()
    qtbot.addWidget(view)
    view.show_findings((finding,))
    (button,) = view.findChildren(QPushButton)
    assert button.accessibleName() == label
    assert button.text().replace("\n", " ") == label
    assert view.minimumSizeHint().width() < 290
