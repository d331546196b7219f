"""The style sheet: shapes and spacing of standard widgets, with the colours of one scheme."""

from string import Template
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from plumbrule_desktop.look import Colours

_SHEET = Template("""
QToolTip { background: $surface; color: $text; border: 1px solid $line; padding: 4px; }
QMenuBar { background: $window; }
QMenuBar::item { padding: 4px 9px; background: transparent; }
QMenuBar::item:selected { background: $raised; border-radius: 4px; }
QMenu { background: $surface; border: 1px solid $line; padding: 4px; }
QMenu::item { padding: 5px 26px 5px 22px; border-radius: 4px; }
QMenu::item:selected { background: $accent; color: $on_accent; }
QMenu::item:disabled { color: $unknown; }
QMenu::separator { height: 1px; background: $line; margin: 4px 8px; }

QFrame[role="card"] { background: $surface; border: 1px solid $line; border-radius: 8px; }
QFrame[role="card"][chosen="true"] { border: 2px solid $accent; }
QFrame[role="plain"] { background: $surface; border: none; border-bottom: 1px solid $line; }
QLabel { background: transparent; }
QLabel[role="muted"] { color: $muted; }
QLabel[role="fault"] { color: $stop; }
QLabel[role="heading"] { font-weight: 600; }
QLabel[role="title"] { font-size: 17px; font-weight: 600; }

QPushButton, QToolButton[role="button"] {
  background: $raised; color: $text; border: 1px solid $line; border-radius: 6px; padding: 5px 12px;
}
QPushButton:hover, QToolButton[role="button"]:hover { border-color: $muted; }
QPushButton:pressed, QToolButton[role="button"]:pressed { background: $line; }
QPushButton:focus, QToolButton[role="button"]:focus { border: 2px solid $accent; padding: 4px 11px; }
QPushButton:disabled, QToolButton[role="button"]:disabled { color: $unknown; background: $window; }
QPushButton[role="primary"] {
  background: $accent; color: $on_accent; border: 1px solid $accent; font-weight: 600; padding: 7px 22px;
}
QPushButton[role="primary"]:hover { border-color: $text; }
QPushButton[role="primary"]:focus { border: 2px solid $text; padding: 6px 21px; }
QPushButton[role="primary"]:disabled { background: $raised; color: $unknown; border-color: $line; }
QPushButton[role="link"] { background: transparent; color: $accent; border: none; padding: 2px 2px; text-align: left; }
QPushButton[role="link"]:hover { text-decoration: underline; }
QPushButton[role="link"]:focus { border: 1px solid $accent; border-radius: 4px; padding: 1px 1px; }
QToolButton[role="quiet"] { background: transparent; border: none; border-radius: 5px; padding: 3px; color: $muted; }
QToolButton[role="quiet"]:hover { background: $raised; color: $text; }
QToolButton[role="quiet"]:focus { border: 1px solid $accent; padding: 2px; }
QToolButton::menu-indicator { image: none; }

QPushButton[role="clause"] {
  background: transparent; color: $accent; border: none; border-bottom: 2px solid $accent; border-radius: 0;
  padding: 1px 1px 0 1px; margin: 0; font-size: 17px; text-align: left;
}
QPushButton[role="clause"]:hover { background: $raised; }
QPushButton[role="clause"]:focus { background: $raised; border-bottom: 3px solid $accent; padding: 1px 1px 0 1px; }
QPushButton[role="clause"]:disabled { color: $unknown; border-bottom-color: $line; background: transparent; }
QPushButton[role="clause"][faulty="true"] { color: $stop; border-bottom: 2px dashed $stop; }
QLabel[role="sentence"] { font-size: 17px; padding: 1px 0 2px 0; }
QFrame[role="popup"] { background: $surface; border: 1px solid $unknown; }
QFrame[role="strip"] { background: $surface; border: none; border-bottom: 1px solid $line; }
QFrame[role="segments"] { background: $raised; border: 1px solid $line; border-radius: 8px; }
QToolButton[role="segment"] { background: transparent; color: $text; border: 1px solid transparent; border-radius: 6px;
  padding: 4px 20px; }
QToolButton[role="segment"]:hover { background: $window; }
QToolButton[role="segment"]:checked { background: $surface; border: 1px solid $line; font-weight: 600; }
QToolButton[role="segment"]:focus { border: 2px solid $accent; padding: 3px 19px; }
QToolButton[role="segment"]:disabled { color: $unknown; }

QLineEdit, QPlainTextEdit, QTextEdit, QSpinBox, QDoubleSpinBox, QComboBox {
  background: $surface; color: $text; border: 1px solid $line; border-radius: 6px; padding: 4px 7px;
  selection-background-color: $accent; selection-color: $on_accent;
}
QLineEdit:focus, QPlainTextEdit:focus, QTextEdit:focus, QSpinBox:focus, QDoubleSpinBox:focus, QComboBox:focus {
  border: 2px solid $accent; padding: 3px 6px;
}
QLineEdit[faulty="true"], QSpinBox[faulty="true"], QDoubleSpinBox[faulty="true"], QComboBox[faulty="true"] {
  border: 2px solid $stop; padding: 3px 6px;
}
QComboBox QAbstractItemView { background: $surface; border: 1px solid $line; selection-background-color: $accent;
  selection-color: $on_accent; outline: 0; }
QScrollArea { background: transparent; border: none; }
QScrollArea > QWidget > QWidget[role="ground"] { background: transparent; }
QScrollBar:vertical { background: transparent; width: 10px; margin: 0; }
QScrollBar::handle:vertical { background: $line; border-radius: 5px; min-height: 28px; }
QScrollBar::handle:vertical:hover { background: $unknown; }
QScrollBar:horizontal { background: transparent; height: 10px; margin: 0; }
QScrollBar::handle:horizontal { background: $line; border-radius: 5px; min-width: 28px; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
QSplitter::handle { background: transparent; }
QHeaderView::section { background: $window; color: $muted; border: none; border-bottom: 1px solid $line; padding: 4px; }
QTableView, QTreeView, QListView { background: $surface; border: 1px solid $line; border-radius: 6px;
  alternate-background-color: $window; gridline-color: $line; }
QProgressBar { background: $raised; border: none; border-radius: 4px; text-align: center; max-height: 8px; }
QProgressBar::chunk { background: $accent; border-radius: 4px; }
""")


def sheet(colours: "Colours") -> str:
    """The style sheet of one scheme."""
    return _SHEET.substitute({name: getattr(colours, name) for name in colours.__slots__})
