"""The one table of actions: menus, shortcuts and tool tips come from here."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMainWindow, QMenu

Standard = QKeySequence.StandardKey


@dataclass(frozen=True, slots=True)
class Row:
    """One action. `group` names actions of which one is on; `rule` draws a line above it in the menu."""

    key: str
    menu: str
    text: str
    tip: str
    shortcut: QKeySequence.StandardKey | str | None = None
    group: str = ""
    rule: bool = False


ROWS = (
    Row("new", "File", "&New casebook", "Begin an empty casebook", Standard.New),
    Row("open", "File", "&Open\u2026", "Open a casebook", Standard.Open),
    Row("demo", "File", "Open &demo", "Open worked questions with molecules to try"),
    Row(
        "save_copy",
        "File",
        "&Save a copy\u2026",
        "Write the whole casebook to another file",
        Standard.SaveAs,
        rule=True,
    ),
    Row("export", "File", "&Export\u2026", "Write this question as a report, a table or data", "Ctrl+E"),
    Row("close", "File", "&Close", "Close the window", Standard.Close, rule=True),
    Row("undo", "Edit", "&Undo", "Take the last step back", Standard.Undo),
    Row("redo", "Edit", "&Redo", "Make the step again", Standard.Redo),
    Row(
        "paste", "Edit", "&Paste molecule", "Put in the molecule on the clipboard", Standard.Paste, rule=True
    ),
    Row("open_molecule", "Edit", "&Molecule from file\u2026", "Put in molecules from files", "Ctrl+M"),
    Row("build", "View", "&Build", "Molecules and recipe", "Ctrl+1", group="page"),
    Row("watch", "View", "&Watch", "The run, task by task", "Ctrl+2", group="page"),
    Row("judge", "View", "&Judge", "The answer and what it is worth", "Ctrl+3", group="page"),
    Row("report", "View", "&Report", "The finished document", "Ctrl+4", group="page"),
    Row("system", "View", "&System colours", "Follow the desktop", group="scheme", rule=True),
    Row("light", "View", "&Light", "Dark on light", group="scheme"),
    Row("dark", "View", "&Dark", "Light on dark", group="scheme"),
    Row("run", "Question", "&Run", "Compute what is not answered yet", "Ctrl+R"),
    Row("stop", "Question", "&Stop", "Stop; what was computed stays", "Ctrl+."),
    Row("ask", "Question", "&What is asked\u2026", "Choose what you want to know", "Ctrl+K", rule=True),
    Row("add", "Question", "&Add a question", "Another question in this casebook", "Ctrl+Shift+N", rule=True),
    Row("rename", "Question", "Re&name\u2026", "Give the question a title", "F2"),
    Row("duplicate", "Question", "&Copy", "A copy of this question with its molecules", "Ctrl+D"),
    Row("remove", "Question", "Re&move", "Take this question out of the casebook"),
    Row("about", "Help", "&About Plumbrule", "Version, libraries and licences"),
)

CHOOSER_KEYS = ("add", "rename", "duplicate", "remove")


def make_actions(window: QMainWindow, slots: Mapping[str, Callable[[], object]]) -> dict[str, QAction]:
    """Every action of the table, connected and in its menu; raises KeyError where a slot is missing."""
    menus: dict[str, QMenu] = {}
    groups: dict[str, QActionGroup] = {}
    made: dict[str, QAction] = {}
    for row in ROWS:
        menu = menus.get(row.menu) or window.menuBar().addMenu(f"&{row.menu}")
        menus[row.menu] = menu
        action = QAction(row.text, window)
        action.setToolTip(row.tip)
        action.setStatusTip(row.tip)
        if row.shortcut is not None:
            action.setShortcut(QKeySequence(row.shortcut))
        if row.group:
            action.setCheckable(True)
            groups.setdefault(row.group, QActionGroup(window)).addAction(action)
        if row.rule:
            menu.addSeparator()
        menu.addAction(action)
        action.triggered.connect(lambda _=False, slot=slots[row.key]: slot())
        made[row.key] = action
    return made
