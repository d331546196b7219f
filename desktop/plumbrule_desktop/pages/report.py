"""The Report page: the finished document as it will be exported, and the exports."""

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QFileDialog, QPushButton, QVBoxLayout, QWidget

from plumbrule_desktop.pages.report_browser import ReportBrowser
from plumbrule_desktop.plots.pace import Pace
from plumbrule_desktop.plots.pictures import file_name
from plumbrule_desktop.state.answer_text import HAZARD, answer_text
from plumbrule_desktop.state.desk import Desk, title_of
from plumbrule_desktop.state.difference import fault_words
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.flow import FlowLayout


class ReportPage(QWidget):
    """The preview is made in the desk's thread, when the page is seen and what it tells has changed."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._turn = 0
        self._shown = ""
        self.browser = ReportBrowser()
        self.caution = label(HAZARD)
        self.empty = label("", "muted")
        self.went = label("", "muted")
        self.went.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.copy = QPushButton("Copy the answer as text")
        self.copy.clicked.connect(self._copy)
        self.buttons: dict[str, QPushButton] = {}
        self._arrange()
        self._pace = Pace(self, self._refresh)
        for signal in (desk.brief_changed, desk.plan_changed, desk.judgement_changed, desk.casebook_changed):
            signal.connect(self._pace.ask)
        self._pace.ask()

    def _arrange(self) -> None:
        head = Card()
        self._row = FlowLayout(spacing=8)
        self._row.addWidget(self.copy)
        head.column.addLayout(self._row)
        head.column.addWidget(self.went)
        head.column.addWidget(self.caution)
        self.went.hide()
        page = QVBoxLayout(self)
        page.setContentsMargins(16, 12, 16, 12)
        page.setSpacing(10)
        page.addWidget(head)
        page.addWidget(self.empty)
        page.addWidget(self.browser, 1)
        page.addStretch(0)

    def _refresh(self) -> None:
        self._show_buttons()
        faults = tuple(fault_words(fault) for fault in self._desk.faults)
        ready = self._desk.plan is not None and not faults
        for button in (*self.buttons.values(), self.copy):
            button.setEnabled(ready)
        self.empty.setVisible(not ready)
        self.browser.setVisible(ready)
        if not ready:
            why = "\n".join(faults) or "The plan is being made."
            self.empty.setText(f"There is nothing to report yet.\n{why}")
            return
        self._turn += 1
        turn = self._turn
        self._desk.report(lambda html: self._show(html, turn))

    def _show(self, html: str, turn: int) -> None:
        if turn != self._turn or html == self._shown:
            return
        self._shown = html
        place = self.browser.verticalScrollBar().value()
        self.browser.setHtml(html)
        self.browser.verticalScrollBar().setValue(place)

    def _show_buttons(self) -> None:
        for suffix, name in (self._desk.offer.exports or {}).items():
            if suffix not in self.buttons:
                button = QPushButton(f"{name}\u2026")
                button.setToolTip(f"Write this question to a {suffix} file")
                button.clicked.connect(
                    lambda _=False, ending=suffix, what=name: self._ask_where(ending, what)
                )
                self._row.addWidget(button)
                self.buttons[suffix] = button

    def _ask_where(self, suffix: str, name: str) -> None:
        start = f"{file_name(title_of(self._desk.brief))}{suffix}"
        chosen, _ = QFileDialog.getSaveFileName(self, name, start, f"{name} (*{suffix})")
        if chosen:
            path = Path(chosen)
            self.export(path if path.suffix.lower() == suffix else path.with_name(path.name + suffix))

    def export(self, path: Path) -> None:
        """Write the question to a file; a line here says where it went."""
        self.went.hide()
        self._desk.export(path, lambda: self._written(path))

    def _written(self, path: Path) -> None:
        self.went.setText(f"Written to {path}")
        self.went.show()

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(answer_text(self._desk.brief, self._desk.judgement))
        self._desk.message.emit("The answer was copied as text.", "note")
