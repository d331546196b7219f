"""The answer at the top of the Judge page: the number, its bar against the accuracy needed, the verdict."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QVBoxLayout, QWidget

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Judgement, Level, Verdict
from plumbrule_desktop.look import colours
from plumbrule_desktop.plots.ticks import step, tick_text, ticks
from plumbrule_desktop.state.amounts import energy, unit_words
from plumbrule_desktop.state.answer_text import can_be_relied_on, question_sentence, target_words, within
from plumbrule_desktop.widgets.card import Card, label, tint

LEVEL_WORDS: dict[Level, str] = {
    "unknown": "Not known yet",
    "sound": "Sound",
    "take care": "Take care",
    "do not rely on it": "Do not rely on it",
}


class AnswerScale(QWidget):
    """The answer's bar drawn on one scale with the accuracy needed."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._value = 0.0
        self._bar: float | None = None
        self._within: float | None = None
        self._unit = ""
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("The uncertainty against the accuracy needed")

    @property
    def has_bar(self) -> bool:
        """Whether a bar is drawn."""
        return self._bar is not None

    def show_values(self, value: float, bar: float | None, needed: float | None, unit: str) -> None:
        """Show these; without a bar nothing is drawn."""
        self._value, self._bar, self._within, self._unit = value, bar, needed, unit
        self.setVisible(bar is not None)
        words = f"uncertainty {bar:.3g}" if bar is not None else "no uncertainty"
        needs = f", accuracy needed {needed:.3g}" if needed is not None else ""
        self.setAccessibleDescription(f"{words}{needs} {unit}")
        self.update()

    def sizeHint(self) -> QSize:
        """Two bars and a scale."""
        return QSize(420, 92)

    def minimumSizeHint(self) -> QSize:
        """Narrow windows get a short scale."""
        return QSize(220, 92)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Both bars around the value, the scale beneath."""
        if self._bar is None:
            return
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        c = colours(self)
        metrics = QFontMetricsF(self.font())
        names = max(metrics.horizontalAdvance(text) for text in ("uncertainty", "needed")) + 14
        lane = QRectF(names, 4, self.width() - names - 14, 56)
        reach = max(self._bar, self._within or 0.0) * 1.25
        low, high = self._value - reach, self._value + reach

        def at(value: float) -> float:
            return lane.left() + (value - low) / (high - low) * lane.width()

        self._draw_scale(painter, lane, low, high)
        middle = at(self._value)
        painter.setPen(QPen(QColor(c.muted), 1, Qt.PenStyle.DashLine))
        painter.drawLine(QPointF(middle, lane.top()), QPointF(middle, lane.bottom()))
        fits = self._within is None or self._bar <= self._within
        rows = (
            ("uncertainty", self._bar, c.sound if fits else c.care, 14.0),
            ("needed", self._within, c.unknown, 40.0),
        )
        for name, size, colour, y in rows:
            if size is None:
                continue
            painter.setPen(QColor(c.muted))
            painter.drawText(
                QRectF(0, y - 10, names - 8, 20),
                Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter,
                name,
            )
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(colour))
            left, right = at(self._value - size), at(self._value + size)
            painter.drawRoundedRect(QRectF(left, y - 6, right - left, 12), 3, 3)
        painter.setPen(QPen(QColor(c.text), 2))
        painter.drawLine(QPointF(middle, 6), QPointF(middle, 22))
        painter.end()

    def _draw_scale(self, painter: QPainter, lane: QRectF, low: float, high: float) -> None:
        c = colours(self)
        most = max(2, int(lane.width() // 80))
        size = step(high - low, most)
        painter.setPen(QPen(QColor(c.line), 1))
        painter.drawLine(lane.bottomLeft(), lane.bottomRight())
        for value in ticks(low, high, most):
            x = lane.left() + (value - low) / (high - low) * lane.width()
            painter.setPen(QPen(QColor(c.line), 1))
            painter.drawLine(QPointF(x, lane.bottom()), QPointF(x, lane.bottom() + 4))
            painter.setPen(QColor(c.muted))
            place = QRectF(x - 50, lane.bottom() + 4, 100, 16)
            painter.drawText(place, Qt.AlignmentFlag.AlignCenter, tick_text(value, size))
        right = QRectF(0, lane.bottom() + 16, self.width() - 2, 16)
        painter.drawText(
            right, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter, unit_words(self._unit)
        )


def said_once(verdict: Verdict) -> tuple[str, tuple[str, ...]]:
    """Headline and reasons without what stands right above them: the level in words, the headline itself."""
    headline = verdict.headline
    opening = f"{verdict.level}:"
    if headline.lower().startswith(opening):
        rest = headline[len(opening) :].strip()
        headline = rest[:1].upper() + rest[1:]
    fresh = tuple(reason for reason in verdict.reasons if reason.rstrip(".").lower() not in headline.lower())
    return headline, fresh


class AnswerCard(Card):
    """The number with its verdict; struck out and grey where it is not to be relied on."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("The answer")
        self.sentence = label("", "muted")
        self.number = label("", "number")
        self.number.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.level = label("", "title")
        self.standing = label("", "muted")
        self.target = label("")
        self.scale = AnswerScale()
        self.headline = label("", "heading")
        self.reasons = label("")
        self.partial = label("", "muted")
        for part in (self.sentence, self.partial, self.number, self.standing, self.scale, self.target):
            self.column.addWidget(part)
        words = QVBoxLayout()
        words.setContentsMargins(0, 6, 0, 0)
        for part in (self.level, self.headline, self.reasons):
            words.addWidget(part)
        self.column.addLayout(words)

    def show_judgement(self, brief: Brief, judgement: Judgement, so_far: str) -> None:
        """Show the answer; `so_far` says what is still to come, empty where all is known."""
        self.sentence.setText(question_sentence(brief))
        self.partial.setText(so_far)
        self.partial.setVisible(bool(so_far))
        self._show_number(brief, judgement)
        verdict = judgement.verdict
        self.level.setText(LEVEL_WORDS[verdict.level])
        tint(self.level, verdict.level)
        headline, reasons = said_once(verdict)
        self.headline.setText(headline)
        self.headline.setVisible(bool(headline))
        self.reasons.setText("\n".join(f"\u2022 {reason}" for reason in reasons))
        self.reasons.setVisible(bool(reasons))

    def _show_number(self, brief: Brief, judgement: Judgement) -> None:
        answer, good = judgement.answer, can_be_relied_on(judgement)
        for part in (self.number, self.standing, self.target):
            part.setVisible(answer is not None)
        if answer is None:
            self.scale.show_values(0.0, None, None, "")
            return
        bar = answer.uncertainty if good else None
        self.number.setText(energy(answer.value, answer.unit, bar))
        self.number.setProperty("struck", "false" if good else "true")
        tint(self.number, None if good else "unknown")
        spoken = (
            self.number.text() if good else f"{self.number.text()}, struck out: do not rely on this number"
        )
        self.number.setAccessibleName(spoken)
        self.standing.setText(f"{answer.rung}/{answer.basis}")
        self.target.setText(target_words(brief, judgement))
        self.scale.show_values(answer.value, bar, within(brief, answer), answer.unit)
