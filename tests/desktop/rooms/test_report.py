import base64
from pathlib import Path
from types import SimpleNamespace

import pytest
from PySide6.QtCore import Qt, QUrl
from PySide6.QtGui import QColor
from PySide6.QtWidgets import QFileDialog

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Plan
from plumbrule_desktop.pages.report import ReportPage
from plumbrule_desktop.pages.report_browser import ReportBrowser, picture
from plumbrule_desktop.plots.pictures import file_name
from plumbrule_desktop.state.seen import Offer

SQUARE = (
    '<svg xmlns="http://www.w3.org/2000/svg" width="40" height="20" viewBox="0 0 40 20">'
    '<rect width="40" height="20" fill="#aa1122"/></svg>'
)
ADDRESS = "data:image/svg+xml;base64," + base64.b64encode(SQUARE.encode()).decode()


@pytest.fixture
def page(qtbot, desk, monkeypatch) -> ReportPage:
    made: list[int] = []

    def report(self, then) -> None:
        made.append(1)
        then(f"<h1>Report {len(made)}</h1>")

    monkeypatch.setattr(type(desk), "report", report)
    desk._offer = Offer(exports={".html": "Report", ".csv": "Table for a spreadsheet"})
    page = ReportPage(desk)
    page.times = made
    qtbot.addWidget(page)
    page.resize(1130, 680)
    with qtbot.waitExposed(page):
        page.show()
    return page


def test_a_drawing_inside_the_page_is_shown_sharp(qapp):
    image = picture(ADDRESS, 2.0)
    assert (image.width(), image.height(), image.devicePixelRatio()) == (80, 40, 2.0)
    assert image.pixelColor(40, 20) == QColor("#aa1122")


def test_a_picture_that_is_none_is_an_empty_one(qapp):
    assert picture("data:image/png;base64,???").isNull()
    assert picture("data:image/svg+xml;base64,AAAA").isNull()


def test_nothing_outside_the_page_is_ever_fetched(qtbot):
    browser = ReportBrowser()
    qtbot.addWidget(browser)
    assert browser.loadResource(2, QUrl("https://example.org/picture.png")) is None
    assert browser.loadResource(2, QUrl.fromLocalFile("/etc/hostname")) is None
    assert not browser.loadResource(2, QUrl(ADDRESS)).isNull()


def test_the_report_is_shown_and_made_anew_only_when_seen(
    qtbot, page: ReportPage, desk, made: SimpleNamespace
):
    qtbot.waitUntil(lambda: "Report" in page.browser.toPlainText())
    seen = len(page.times)
    page.hide()
    desk.put(judgement=made.judged())
    qtbot.wait(150)
    assert len(page.times) == seen
    page.show()
    qtbot.waitUntil(lambda: len(page.times) == seen + 1)


def test_the_caution_on_hazards_is_always_in_sight(page: ReportPage):
    assert page.caution.isVisible()
    assert "local rules" in page.caution.text()
    assert "qualified person" in page.caution.text()


def test_there_is_a_button_for_every_format_and_it_says_where_the_file_went(
    qtbot, page: ReportPage, desk, monkeypatch, tmp_path: Path
):
    assert set(page.buttons) == {".html", ".csv"}
    written: list[Path] = []

    def export(self, path: Path, then) -> None:
        written.append(path)
        then()

    monkeypatch.setattr(type(desk), "export", export)
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *a: (str(tmp_path / "answer"), ""))
    qtbot.mouseClick(page.buttons[".csv"], Qt.MouseButton.LeftButton)
    assert written == [tmp_path / "answer.csv"]
    assert page.went.text() == f"Written to {tmp_path / 'answer.csv'}"
    assert page.went.isVisible()


def test_a_dialogue_that_is_cancelled_writes_nothing(qtbot, page: ReportPage, desk, monkeypatch):
    monkeypatch.setattr(
        type(desk), "export", lambda self, path, then: pytest.fail("nothing was to be written")
    )
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *a: ("", ""))
    qtbot.mouseClick(page.buttons[".html"], Qt.MouseButton.LeftButton)
    assert not page.went.isVisible()


def test_a_question_that_cannot_run_has_no_report_and_says_why(qtbot, page: ReportPage, desk):
    desk.put(brief=Brief(), plan=Plan())
    qtbot.waitUntil(lambda: page.empty.isVisible())
    assert "No question is asked yet." in page.empty.text()
    assert "question:" not in page.empty.text()
    assert not page.browser.isVisible()
    assert page.empty.y() < 200, "the words stand at the top, under the buttons"
    assert not page.buttons[".html"].isEnabled()


def test_a_title_becomes_a_name_that_every_disk_takes():
    assert file_name("bond energy of N1-N2 in nitrogen/air: 2") == "bond_energy_of_N1-N2_in_nitrogen_air_2"
    assert file_name("///") == "picture"
