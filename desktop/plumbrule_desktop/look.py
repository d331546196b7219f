"""How the window looks: a palette for light, one for dark, one accent. Every colour comes from here."""

from dataclasses import asdict, dataclass
from typing import Literal

from PySide6.QtGui import QColor, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication, QWidget

from plumbrule_core.documents.findings import Level, Severity
from plumbrule_desktop.sheet import sheet

Scheme = Literal["system", "light", "dark"]

PHASES = ("#D55E00", "#0072B2")
"""Vermillion for +, blue for - (Okabe and Ito, Color Universal Design, 2008)."""


@dataclass(frozen=True, slots=True)
class Colours:
    """The colours of one scheme."""

    window: str
    """Ground of the window."""
    surface: str
    """Ground of cards, lists and plots."""
    raised: str
    """Ground of buttons and of what the pointer is over."""
    line: str
    """Borders and grids."""
    text: str
    muted: str
    """Secondary text; at least 4.5:1 on window and surface."""
    accent: str
    on_accent: str
    sound: str
    care: str
    stop: str
    unknown: str

    def level(self, level: Level) -> str:
        """The colour of a verdict; always shown with words or a mark as well."""
        return {
            "sound": self.sound,
            "take care": self.care,
            "do not rely on it": self.stop,
            "unknown": self.unknown,
        }[level]

    def severity(self, severity: Severity) -> str:
        """The colour of a finding's mark."""
        return {"note": self.accent, "care": self.care, "stop": self.stop}[severity]


LIGHT = Colours(
    window="#f3f2ee",
    surface="#fdfdfb",
    raised="#e9e7e1",
    line="#d3d0c7",
    text="#22242a",
    muted="#5c5f67",
    accent="#1f5f8b",
    on_accent="#ffffff",
    sound="#2a7048",
    care="#96590a",
    stop="#b3261e",
    unknown="#7b7e86",
)
DARK = Colours(
    window="#181a1d",
    surface="#212327",
    raised="#2f3238",
    line="#444950",
    text="#e8e6e1",
    muted="#a6a9b0",
    accent="#6fb2e0",
    on_accent="#10202c",
    sound="#6cc391",
    care="#e3a54a",
    stop="#f28b80",
    unknown="#8d9097",
)


def colours(widget: QWidget | None = None) -> Colours:
    """The colours that fit the palette of a widget, or of the application."""
    palette = widget.palette() if widget is not None else QGuiApplication.palette()
    return DARK if palette.color(QPalette.ColorRole.Window).lightness() < 128 else LIGHT


def palette_of(c: Colours) -> QPalette:
    """The palette of one scheme, for the Fusion style."""
    role = QPalette.ColorRole
    pairs = {
        role.Window: c.window,
        role.WindowText: c.text,
        role.Base: c.surface,
        role.AlternateBase: c.window,
        role.Text: c.text,
        role.Button: c.raised,
        role.ButtonText: c.text,
        role.BrightText: c.stop,
        role.Highlight: c.accent,
        role.HighlightedText: c.on_accent,
        role.ToolTipBase: c.surface,
        role.ToolTipText: c.text,
        role.PlaceholderText: c.muted,
        role.Link: c.accent,
        role.LinkVisited: c.accent,
        role.Accent: c.accent,
        role.Mid: c.line,
        role.Midlight: c.line,
        role.Dark: c.line,
    }
    palette = QPalette()
    for each, colour in pairs.items():
        palette.setColor(each, QColor(colour))
    for each in (role.WindowText, role.Text, role.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, each, QColor(c.unknown))
    palette.setColor(QPalette.ColorGroup.Disabled, role.Highlight, QColor(c.line))
    return palette


def wear(app: QApplication, scheme: Scheme) -> None:
    """Dress the whole application; `system` follows the desktop where it says what it wants."""
    dark = scheme == "dark" or (scheme == "system" and system_is_dark(app))
    chosen = DARK if dark else LIGHT
    app.setStyle("Fusion")
    app.setPalette(palette_of(chosen))
    app.setStyleSheet(sheet(asdict(chosen), "dark" if dark else "light"))


def system_is_dark(app: QApplication) -> bool:
    """Whether the desktop asks for a dark scheme."""
    from PySide6.QtCore import Qt

    return app.styleHints().colorScheme() == Qt.ColorScheme.Dark
