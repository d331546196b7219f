"""The question line: which question, its sentence with underlined controls, the forecast, and Run or Stop."""

from collections.abc import Iterable
from itertools import pairwise

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QMenu,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.questions import Clause
from plumbrule_desktop.question_popups import popup_for
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.state.progress import left_of
from plumbrule_desktop.state.wording import forecast_details, forecast_words
from plumbrule_desktop.widgets.card import label
from plumbrule_desktop.widgets.flow import FlowLayout
from plumbrule_desktop.widgets.popup import Popup

CHOOSER_WIDTH = 225
NO_MOLECULE = (Clause(text="Put a molecule in, then ask what you want to know."),)
NO_QUESTION = (Clause(text="Ask: "), Clause(text="what do you want to know?", key="kind"))


class ClauseButton(QPushButton):
    """An underlined piece of the sentence, no wider than its words."""

    def sizeHint(self) -> QSize:
        """The words alone."""
        metrics = self.fontMetrics()
        return QSize(metrics.horizontalAdvance(self.text().replace("&&", "&")) + 3, metrics.height() + 6)

    def minimumSizeHint(self) -> QSize:
        """The same."""
        return self.sizeHint()


class Sentence(QWidget):
    """The sentence; each clause with a key is a button that opens its editor. Tab comes from `before`."""

    def __init__(self, desk: Desk, before: QWidget, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._before = before
        self._flow = FlowLayout(self, spacing=0, line_spacing=4)
        self._shown: tuple[object, ...] = ()
        self.clauses: dict[str, QPushButton] = {}
        desk.brief_changed.connect(self.refresh)
        desk.casebook_changed.connect(self.refresh)

    def refresh(self) -> None:
        """Show the sentence of the chosen question."""
        clauses, read_only = _clauses(self._desk.brief), self._desk.casebook.read_only
        wrong = _wrong_keys(self._desk.brief)
        if (clauses, read_only, wrong) == self._shown:
            return
        self._shown = (clauses, read_only, wrong)
        focused = next((key for key, button in self.clauses.items() if button.hasFocus()), None)
        self._clear()
        for clause in clauses:
            self._flow.addWidget(
                self._control(clause, read_only, wrong) if clause.key else _words(clause.text)
            )
        for one, following in pairwise((self._before, *self.clauses.values())):
            QWidget.setTabOrder(one, following)
        if focused in self.clauses:
            self.clauses[focused].setFocus()
        self.setAccessibleName("".join(clause.text for clause in clauses))

    def _control(self, clause: Clause, read_only: bool, wrong: frozenset[str]) -> QPushButton:
        button = ClauseButton(clause.text.replace("&", "&&"), self)
        button.setProperty("role", "clause")
        button.setProperty("faulty", "true" if clause.key in wrong else "false")
        button.setCursor(Qt.CursorShape.PointingHandCursor)
        button.setAccessibleDescription("Press to change")
        button.setEnabled(not read_only)
        button.clicked.connect(lambda: self.open_editor(clause.key))
        self.clauses[clause.key] = button
        return button

    def open_editor(self, key: str) -> Popup | None:
        """Open the editor of one clause."""
        popup = popup_for(key, self._desk, self)
        if popup is not None:
            popup.open_under(self.clauses.get(key, self))
        return popup

    def _clear(self) -> None:
        self.clauses.clear()
        while (item := self._flow.takeAt(0)) is not None:
            widget = item.widget()
            if widget is not None:
                widget.hide()
                widget.deleteLater()


class Chooser(QPushButton):
    """Which question is shown; its menu lists them all, and the ways to add, rename, copy, remove."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._actions: tuple[QAction, ...] = ()
        self.setFixedWidth(CHOOSER_WIDTH)
        self.setProperty("role", "chooser")
        self.setMenu(QMenu(self))
        self.menu().aboutToShow.connect(self._fill)
        desk.briefs_changed.connect(self.refresh)
        self.refresh()

    def set_actions(self, actions: Iterable[QAction]) -> None:
        """The actions below the list, from the one table of actions."""
        self._actions = tuple(actions)

    def _fill(self) -> None:
        menu = self.menu()
        menu.clear()
        for entry in self._desk.entries:
            action = menu.addAction(entry.title.replace("&", "&&"))
            action.setCheckable(True)
            action.setChecked(entry.id == self._desk.brief_id)
            action.triggered.connect(lambda _=False, number=entry.id: self._desk.choose(number))
        menu.addSeparator()
        menu.addActions(list(self._actions))

    def refresh(self) -> None:
        """Show the title of the chosen question."""
        entries = self._desk.entries
        title = next((entry.title for entry in entries if entry.id == self._desk.brief_id), "No question")
        room = CHOOSER_WIDTH - 46
        short = self.fontMetrics().elidedText(title, Qt.TextElideMode.ElideRight, room)
        self.setText(f"\u2002{short}".replace("&", "&&"))
        many = (
            f"{len(entries)} questions in this casebook"
            if len(entries) != 1
            else "The only question of this casebook"
        )
        self.setToolTip(f"{title}\n{many}")
        self.setAccessibleName(f"Question: {title}")

    def rename(self) -> Popup:
        """Ask for another title."""
        popup = Popup("A title for this question", self)
        field = QLineEdit(self._desk.brief.title)
        field.setPlaceholderText("empty: the question itself")
        field.setMaxLength(200)
        field.setMinimumWidth(300)
        field.setAccessibleName("Title")
        popup.column.addWidget(field)

        def take() -> None:
            text = field.text().strip()
            popup.close()
            self._desk.edit((Edit(path="title", value=text),), "Rename the question")

        popup.add_done().clicked.connect(take)
        field.returnPressed.connect(take)
        popup.open_under(self)
        field.setFocus()
        return popup


class QuestionLine(QFrame):
    """Chooser, sentence, forecast and the one primary button, above the pages."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setProperty("role", "plain")
        self._desk = desk
        self.chooser = Chooser(desk)
        self.sentence = Sentence(desk, self.chooser)
        self.trouble = label("", "fault")
        self.forecast = label("", "muted", wrap=False)
        self.forecast.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self.button = QPushButton("Run")
        self.button.setProperty("role", "primary")
        self.button.setMinimumWidth(104)
        middle = QVBoxLayout()
        middle.setSpacing(2)
        middle.addStretch(1)
        middle.addWidget(self.sentence)
        middle.addWidget(self.trouble)
        middle.addStretch(1)
        row = QHBoxLayout(self)
        row.setContentsMargins(14, 9, 14, 9)
        row.setSpacing(14)
        row.addWidget(self.chooser)
        row.addLayout(middle, 1)
        row.addWidget(self.forecast)
        row.addWidget(self.button)
        self.button.clicked.connect(lambda: desk.stop() if desk.running else desk.run())
        for signal in (desk.brief_changed, desk.plan_changed, desk.run_changed, desk.casebook_changed):
            signal.connect(self.refresh)
        self.sentence.refresh()
        self.refresh()

    def refresh(self) -> None:
        """Show the forecast, what is wrong with the question, and what the button does now."""
        desk = self._desk
        plan, faults = desk.plan, desk.faults
        ordered = sorted(faults, key=lambda fault: not fault.where.startswith("question"))
        unasked = desk.brief.question is None
        shown = [fault.says for fault in ordered if not (unasked and fault.where == "question")]
        self.trouble.setText(shown[0][:1].upper() + shown[0][1:] + "." if shown else "")
        self.trouble.setToolTip("\n".join(shown))
        self.trouble.setVisible(bool(shown))
        left = self._left() if plan and not faults else Plan()
        total = left.forecast
        pending = plan is None and not faults and desk.brief_id is not None
        done = plan is not None and not faults and bool(plan.tasks)
        rest = "all answered" if done else "counting\u2026" if pending else ""
        self.forecast.setText(forecast_words(total) if total else rest)
        self.forecast.setToolTip(forecast_details(total) if total else "")
        self._dress_button()

    @property
    def can_run(self) -> bool:
        """Whether Run would start something."""
        desk = self._desk
        ready = desk.plan is not None and not desk.faults and not desk.casebook.read_only
        return ready and not desk.running and bool(self._left().tasks)

    def _left(self) -> Plan:
        return left_of(self._desk.plan or Plan(), self._desk.state)

    def _dress_button(self) -> None:
        desk = self._desk
        if desk.running:
            self.button.setText("Stopping\u2026" if desk.stopping else "Stop")
            self.button.setEnabled(not desk.stopping)
            self.button.setToolTip("Stop; what was computed stays")
            return
        self.button.setText("Run")
        self.button.setEnabled(self.can_run)
        says = "Compute what is not answered yet" if self.can_run else "There is nothing left to compute"
        self.button.setToolTip("\n".join(fault.says for fault in desk.faults) or says)


def _clauses(brief: Brief) -> tuple[Clause, ...]:
    if not brief.species and brief.question is None:
        return NO_MOLECULE
    return brief.question.sentence(brief.by_name) if brief.question else NO_QUESTION


def _wrong_keys(brief: Brief) -> frozenset[str]:
    """The keys of the sentence at which the question itself is wrong."""
    places = (fault.where.split(".") for fault in brief.faults())
    return frozenset(steps[1] for steps in places if steps[0] == "question" and len(steps) > 1)


def _words(text: str) -> QLabel:
    words = label(text, "sentence", wrap=False)
    words.setIndent(0)
    return words
