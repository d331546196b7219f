"""Findings as cards: the severity as mark and word, the headline, the consequence, and remedies."""

from collections.abc import Iterable
from textwrap import fill

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from plumbrule_core.documents.findings import Evidence, Finding, Remedy, Severity
from plumbrule_core.documents.sources import cited
from plumbrule_desktop.models.readings import reading_name
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.flow import FlowLayout
from plumbrule_desktop.widgets.mark import SeverityMark

WORDS: dict[Severity, str] = {"note": "Good to know", "care": "Take care", "stop": "Do not rely on it"}
_ORDER: dict[Severity, int] = {"stop": 0, "care": 1, "note": 2}

WIDEST = 32
"""Characters on one line of a remedy's button, so that it fits the narrowest column."""


class FindingCard(Card):
    """One finding."""

    chosen = Signal(object)
    """The remedy whose button was pressed."""

    def __init__(self, finding: Finding, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.finding = finding
        self.setAccessibleName(f"{WORDS[finding.severity]}: {finding.headline}")
        self.setAccessibleDescription(finding.consequence)
        top = QHBoxLayout()
        top.setSpacing(8)
        top.addWidget(SeverityMark(finding.severity))
        words = WORDS[finding.severity] + (f" \u00b7 {finding.species}" if finding.species else "")
        top.addWidget(label(words, "muted"), 1)
        self.column.addLayout(top)
        self.column.addWidget(label(finding.headline, "heading"))
        self.column.addWidget(label(finding.consequence))
        for evidence in finding.evidence:
            self.column.addWidget(label(evidence_words(evidence), "muted"))
        if finding.remedies:
            self.column.addLayout(self._remedies(finding.remedies))

    def _remedies(self, remedies: tuple[Remedy, ...]) -> FlowLayout:
        row = FlowLayout(spacing=6)
        for remedy in remedies:
            if remedy.edits or remedy.then_run:
                button = QPushButton(fill(remedy.label, WIDEST))
                button.setAccessibleName(remedy.label)
                button.setAutoDefault(False)
                button.clicked.connect(lambda _=False, each=remedy: self.chosen.emit(each))
                row.addWidget(button)
            else:
                self.column.addWidget(label(f"\u2192 {remedy.label}"))
        return row


class FindingsView(QWidget):
    """A column of finding cards, the gravest first; `remedy_chosen` carries the remedy to apply."""

    remedy_chosen = Signal(object)

    def __init__(self, empty: str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(8)
        self._empty = label(empty, "muted")
        self._column.addWidget(self._empty)
        self._cards: list[FindingCard] = []
        self._shown: tuple[Finding, ...] | None = None
        self.show_findings(())

    @property
    def cards(self) -> tuple[FindingCard, ...]:
        """The cards as they are shown."""
        return tuple(self._cards)

    def show_findings(self, findings: Iterable[Finding]) -> None:
        """Show these; nothing is rebuilt where nothing changed."""
        ordered = tuple(sorted(findings, key=lambda finding: _ORDER[finding.severity]))
        if ordered == self._shown:
            return
        self._shown = ordered
        for card in self._cards:
            self._column.removeWidget(card)
            card.hide()
            card.deleteLater()
        self._cards = [FindingCard(finding, self) for finding in ordered]
        for card in self._cards:
            card.chosen.connect(self.remedy_chosen)
            self._column.addWidget(card)
        self._empty.setVisible(not ordered and bool(self._empty.text()))


def evidence_words(evidence: Evidence) -> str:
    """`T1: 0.031; the limit is 0.02 (Lee and Taylor 1989)`; only a source that can be looked up is named."""
    value = f"{evidence.value:.3g}" if isinstance(evidence.value, float) else evidence.value
    unit = f" {evidence.unit}" if evidence.unit else ""
    limit = f"; the limit is {evidence.threshold:.3g}{unit}" if evidence.threshold is not None else ""
    source = cited(evidence.source)
    behind = f" ({source})" if source else ""
    name = reading_name(evidence.reading)
    return f"{name[:1].upper()}{name[1:]}: {value}{unit}{limit}{behind}"
