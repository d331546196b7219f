"""The Judge page: the answer, how the rungs compare, the budget, the readings, the findings and remedies."""

from PySide6.QtGui import QGuiApplication, QResizeEvent
from PySide6.QtWidgets import QBoxLayout, QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Judgement, Remedy
from plumbrule_desktop.findings_view import FindingsView
from plumbrule_desktop.pages.judge_answer import AnswerCard
from plumbrule_desktop.pages.judge_views import JudgeViews
from plumbrule_desktop.plots.pace import Pace
from plumbrule_desktop.state.answer_text import answer_text
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.state.difference import differences, fault_words, needs_only
from plumbrule_desktop.state.progress import ANSWERED, left_of
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.scrolling import scroll_down

NARROW = 900
"""Below this width, in points, the findings stand under the answer."""


class ChangedStrip(Card):
    """Says what was changed since there was an answer, and offers to take it back."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._brief_id: int | None = None
        self._before = Brief()
        self._answered = False
        self.words = label("")
        self.undo = QPushButton("Undo")
        self.undo.clicked.connect(desk.undo)
        row = QHBoxLayout()
        row.addWidget(self.words, 1)
        row.addWidget(self.undo)
        self.column.addLayout(row)
        self.hide()

    def refresh(self) -> None:
        """Compare the question with the one that was run or opened last, if that one had an answer."""
        desk = self._desk
        if desk.brief_id != self._brief_id or desk.running or self._before == Brief():
            self._brief_id, self._before, self._answered = desk.brief_id, desk.brief, False
        if desk.brief == self._before and desk.judgement is not None:
            self._answered = desk.judgement.answer is not None
        changes = differences(self._before, desk.brief) if self._answered else ()
        self.setVisible(bool(changes))
        self.words.setText(" ".join(filter(None, (f"Changed: {'; '.join(changes)}.", self._what_now()))))
        self.undo.setEnabled(desk.casebook.undo_label is not None)

    def _what_now(self) -> str:
        desk = self._desk
        if needs_only(self._before, desk.brief):
            return "The answer is judged against the new need; nothing has to be computed."
        if desk.plan is None or desk.faults:
            return ""
        if left_of(desk.plan, desk.state).tasks:
            return "Run it to see what that does to the answer."
        return "What it needs was computed before; nothing has to be computed."


class JudgePage(QWidget):
    """What is known of the chosen question, also while its run is under way."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.empty = label("", "title")
        self.empty_line = label("", "muted")
        self.changed = ChangedStrip(desk)
        self.answer = AnswerCard()
        self.copy = QPushButton("Copy the answer as text")
        self.copy.clicked.connect(self._copy)
        self.views = JudgeViews()
        self.findings = FindingsView("Nothing was found that speaks against this number.")
        self.findings.remedy_chosen.connect(self._apply)
        self._arrange()
        self._pace = Pace(self, self._refresh)
        for signal in (desk.brief_changed, desk.plan_changed, desk.run_changed, desk.judgement_changed):
            signal.connect(self._pace.ask)
            signal.connect(self.changed.refresh)
        desk.casebook_changed.connect(self.changed.refresh)
        self._pace.ask()

    def _arrange(self) -> None:
        self._nothing = Card()
        self._nothing.column.addWidget(self.empty)
        self._nothing.column.addWidget(self.empty_line)
        copy_row = QHBoxLayout()
        copy_row.addWidget(self.copy)
        copy_row.addStretch(1)
        self.answer.column.addLayout(copy_row)
        left, right = QWidget(), QWidget()
        left_column, right_column = QVBoxLayout(left), QVBoxLayout(right)
        for column in (left_column, right_column):
            column.setContentsMargins(0, 0, 0, 0)
            column.setSpacing(10)
        left_column.addWidget(self.answer)
        left_column.addWidget(self.views, 1)
        right_column.addWidget(label("Findings", "heading"))
        right_column.addWidget(self.findings)
        right_column.addStretch(1)
        self._sides = QWidget()
        self._split = QBoxLayout(QBoxLayout.Direction.LeftToRight, self._sides)
        self._split.setContentsMargins(0, 0, 0, 0)
        self._split.setSpacing(14)
        self._split.addWidget(left, 3)
        self._split.addWidget(right, 2)
        column = QVBoxLayout()
        column.setContentsMargins(16, 12, 16, 12)
        column.setSpacing(10)
        for part in (self.changed, self._nothing, self._sides):
            column.addWidget(part)
        column.addStretch(1)
        scroll_down(self, column)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Side by side where there is room."""
        wide = event.size().width() >= NARROW
        way = QBoxLayout.Direction.LeftToRight if wide else QBoxLayout.Direction.TopToBottom
        self._split.setDirection(way)
        super().resizeEvent(event)

    def _refresh(self) -> None:
        judgement = self._desk.judgement
        known = judgement is not None and bool(judgement.answer or judgement.findings or _measured(judgement))
        self._nothing.setVisible(not known)
        self._sides.setVisible(known)
        if judgement is None or not known:
            self._show_nothing()
            return
        self.answer.show_judgement(self._desk.brief, judgement, self._so_far())
        self.copy.setEnabled(judgement.answer is not None)
        self.views.show_judgement(self._desk.brief, judgement)
        self.findings.show_findings(judgement.findings)

    def _show_nothing(self) -> None:
        desk = self._desk
        faults = tuple(fault_words(fault) for fault in desk.faults)
        if faults:
            self.empty.setText("There is no answer, because the question cannot be run yet")
            self.empty_line.setText("\n".join(faults))
        elif desk.running:
            self.empty.setText("No answer yet")
            self.empty_line.setText(
                "The run is under way. The first numbers appear here as soon as they are there."
            )
        else:
            self.empty.setText("No answer yet")
            self.empty_line.setText(
                "Press Run above. After a run this page says what the number is, how far it can be trusted, "
                "and what to do if it cannot."
            )

    def _so_far(self) -> str:
        states = self._desk.state.tasks.values()
        done = sum(one.state in ANSWERED for one in states)
        if not states or done == len(states):
            return ""
        more = (
            "The run goes on and the answer may change." if self._desk.running else "Run to compute the rest."
        )
        return f"So far: {done} of {len(states)} tasks are done. {more}"

    def _apply(self, remedy: Remedy) -> None:
        self._desk.apply(remedy)

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(answer_text(self._desk.brief, self._desk.judgement))
        self._desk.message.emit("The answer was copied as text.", "note")


def _measured(judgement: Judgement) -> bool:
    return any(one.readings or one.energies for one in judgement.species)
