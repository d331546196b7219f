"""The plumb line: a cord and a bob that say how far the number can be trusted, always in sight."""

import math
import os

from PySide6.QtCore import QEasingCurve, QPointF, QRectF, QSize, Qt, QVariantAnimation
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QSizePolicy, QStyle, QVBoxLayout, QWidget

from plumbrule_core.documents.findings import Judgement, Level, Verdict
from plumbrule_desktop.look import colours
from plumbrule_desktop.state.amounts import energy
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.state.progress import ANSWERED
from plumbrule_desktop.widgets.card import label

WIDTH = 164
STILL_VARIABLE = "PLUMBRULE_STILL"
"""Set to anything, it keeps the bob from swinging (tests, and people whom movement disturbs)."""
DEGREES: dict[Level, float] = {"unknown": 0.0, "sound": 0.0, "take care": 20.0, "do not rely on it": 74.0}
WORDS: dict[Level, str] = {
    "unknown": "Nothing known yet",
    "sound": "Sound",
    "take care": "Take care",
    "do not rely on it": "Do not rely on it",
}


class Bob(QWidget):
    """The drawing alone."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self._level: Level = "unknown"
        self._degrees = 0.0
        self._swing = QVariantAnimation(self, duration=420)
        self._swing.setEasingCurve(QEasingCurve.Type.OutBack)
        self._swing.valueChanged.connect(self._at)

    @property
    def degrees(self) -> float:
        """How far the cord leans."""
        return self._degrees

    def sizeHint(self) -> QSize:
        """As wide as the column."""
        return QSize(WIDTH, 210)

    def show_level(self, level: Level) -> None:
        """Swing to a verdict."""
        self._level = level
        self._swing.stop()
        if self._may_move() and DEGREES[level] != self._degrees:
            self._swing.setStartValue(self._degrees)
            self._swing.setEndValue(DEGREES[level])
            self._swing.start()
        else:
            self._at(DEGREES[level])
        self.update()

    def _may_move(self) -> bool:
        moves = self.style().styleHint(QStyle.StyleHint.SH_Widget_Animation_Duration, None, self) > 0
        return moves and self.isVisible() and not os.environ.get(STILL_VARIABLE)

    def _at(self, degrees: float) -> None:
        self._degrees = float(degrees)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """The board's mark, the cord, the bob."""
        c = colours(self)
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        lean = math.radians(self._degrees)
        top, length = 16.0, 138.0
        over = min(1.0, max(0.0, self._degrees / DEGREES["do not rely on it"]))
        anchor = QPointF(self.width() / 2 - over * (self.width() / 2 - 20), top)
        length -= over * 42
        self._scale(painter, QColor(c.line), anchor)
        end = anchor + QPointF(math.sin(lean), math.cos(lean)) * length
        shade = QColor(c.level(self._level))
        painter.setPen(QPen(shade if self._level != "unknown" else QColor(c.unknown), 1.8))
        painter.drawLine(anchor, end)
        painter.setBrush(QColor(c.muted))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.drawRoundedRect(QRectF(anchor.x() - 13, top - 8, 26, 7), 2, 2)
        painter.translate(end)
        painter.rotate(-self._degrees)
        painter.setBrush(shade)
        painter.drawRoundedRect(QRectF(-5, -1, 10, 7), 2, 2)
        painter.drawPolygon(_BOB)
        painter.end()

    def _scale(self, painter: QPainter, line: QColor, anchor: QPointF) -> None:
        """Where the cord would hang, so that a lean can be seen."""
        painter.setPen(QPen(line, 1.2, Qt.PenStyle.DashLine))
        painter.drawLine(anchor, QPointF(anchor.x(), self.height() - 8))


_BOB = QPolygonF(
    [QPointF(*p) for p in ((-13, 7), (13, 7), (14.5, 12), (3.5, 38), (0, 46), (-3.5, 38), (-14.5, 12))]
)


class PlumbLine(QWidget):
    """The bob with the verdict and the answer in words beneath it."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.setFixedWidth(WIDTH)
        self.setAccessibleName("Verdict")
        self.bob = Bob(self)
        self.words = label("", "title")
        self.answer = label("", "heading")
        self.headline = label("", "muted")
        column = QVBoxLayout(self)
        column.setContentsMargins(12, 12, 12, 12)
        column.setSpacing(6)
        column.addWidget(self.bob)
        for line in (self.words, self.answer, self.headline):
            line.setAlignment(Qt.AlignmentFlag.AlignHCenter)
            column.addWidget(line)
        column.addStretch(1)
        desk.judgement_changed.connect(self.refresh)
        desk.plan_changed.connect(self.refresh)
        desk.brief_changed.connect(self.refresh)
        desk.run_changed.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """Show the verdict of the chosen question."""
        judgement = self._desk.judgement
        verdict = judgement.verdict if judgement else Verdict(level="unknown")
        self.bob.show_level(verdict.level)
        self.words.setText(self._so_far() if verdict.level == "unknown" else WORDS[verdict.level])
        c = colours(self)
        self.words.setStyleSheet(
            f"color: {c.muted if verdict.level == 'unknown' else c.level(verdict.level)}"
        )
        self.answer.setText(_answer(judgement))
        self.answer.setVisible(bool(self.answer.text()))
        self.headline.setText(_headline(verdict))
        self.setToolTip("\n".join(verdict.reasons))
        self.setAccessibleDescription(
            ". ".join(filter(None, (self.words.text(), self.answer.text(), self.headline.text())))
        )

    def _so_far(self) -> str:
        """What is known where there is no verdict: how many tasks are done."""
        tasks = self._desk.state.tasks.values()
        done = sum(one.state in ANSWERED for one in tasks)
        judgement = self._desk.judgement
        opening = "So far" if judgement and judgement.answer else "No answer yet"
        return f"{opening}, {done} of {len(tasks)} done" if done else WORDS["unknown"]


def _headline(verdict: Verdict) -> str:
    """The headline without the words that stand above it already."""
    if verdict.level == "unknown":
        return ""
    says = verdict.headline.removeprefix(f"{WORDS[verdict.level]}: ")
    return says[:1].upper() + says[1:]


def _answer(judgement: Judgement | None) -> str:
    answer = judgement.answer if judgement else None
    return energy(answer.value, answer.unit, answer.uncertainty) if answer else ""
