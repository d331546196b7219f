"""The window: the shell at once, the pages after the first paint, and an orderly end."""

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QEvent, QObject, Qt, QTimer
from PySide6.QtGui import QCloseEvent, QKeySequence
from PySide6.QtWidgets import (
    QApplication,
    QFileDialog,
    QHBoxLayout,
    QMainWindow,
    QMenu,
    QMessageBox,
    QVBoxLayout,
    QWidget,
)

from plumbrule_desktop import look
from plumbrule_desktop.about import about_text
from plumbrule_desktop.actions import CHOOSER_KEYS, make_actions
from plumbrule_desktop.leaving import Leaving
from plumbrule_desktop.page_stack import PAGES, PageStack
from plumbrule_desktop.plumb_line import PlumbLine
from plumbrule_desktop.question_line import QuestionLine
from plumbrule_desktop.scene.three_d import ThreeD
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.banner import Banner
from plumbrule_desktop.widgets.segments import Segments

CASEBOOKS = "Casebooks (*.plumb)"


PATIENCE_MS = 1500
"""How long the other pages wait for the first plan."""


class Window(QMainWindow):
    """One window over one desk."""

    def __init__(self, settings: Settings, begin: Callable[[Desk], None] = Desk.new) -> None:
        super().__init__()
        self.settings = settings
        self.desk = Desk(self)
        self.three_d = ThreeD(settings, self)
        self._begin = begin
        self._painted = False
        self._ended = False
        self._remembered: Path | None = None
        self.resize(1280, 800)
        self.setMinimumSize(940, 600)
        self.setAcceptDrops(False)
        self.banner = Banner()
        self.question_line = QuestionLine(self.desk)
        self.segments = Segments((name.capitalize() for name in PAGES), "Pages")
        self.leaving = Leaving(self, self.desk, self.ask_save)
        self.stack = PageStack(self.desk, self.three_d)
        self.stack.page_wanted.connect(lambda name: self.show_page(PAGES.index(name)))
        self.stack.demo_wanted.connect(lambda: self.leaving.replace(self.desk.open_demo))
        self.plumb_line = PlumbLine(self.desk)
        self._compose()
        self.actions_by_key = make_actions(self, self._slots())
        self._finish_menus()
        self._connect()
        self._refresh_casebook()
        geometry = settings.geometry
        if geometry is not None:
            self.restoreGeometry(geometry)

    # putting it together

    def _compose(self) -> None:
        switch = QHBoxLayout()
        switch.setContentsMargins(14, 8, 14, 4)
        switch.addWidget(self.segments)
        switch.addStretch(1)
        left = QVBoxLayout()
        left.setContentsMargins(0, 0, 0, 0)
        left.setSpacing(0)
        for part in (self.question_line, self.banner, switch):
            left.addLayout(part) if isinstance(part, QHBoxLayout) else left.addWidget(part)
        left.addWidget(self.stack, 1)
        ground = QWidget()
        row = QHBoxLayout(ground)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(0)
        row.addLayout(left, 1)
        row.addWidget(self.plumb_line)
        ground.setFocusPolicy(Qt.FocusPolicy.ClickFocus)
        self.setCentralWidget(ground)
        ground.setFocus()
        ground.installEventFilter(self)

    def _slots(self) -> dict[str, Callable[[], object]]:
        desk, chooser = self.desk, self.question_line.chooser
        pages = {name: lambda place=place: self.show_page(place) for place, name in enumerate(PAGES)}
        schemes = {name: lambda name=name: self.wear(name) for name in ("system", "light", "dark")}
        return {
            **pages,
            **schemes,
            "new": lambda: self.leaving.replace(desk.new),
            "open": self.ask_open,
            "demo": lambda: self.leaving.replace(desk.open_demo),
            "save_copy": self.ask_save,
            "export": self.ask_export,
            "close": self.close,
            "undo": desk.undo,
            "redo": desk.redo,
            "paste": lambda: self._build_page("paste"),
            "open_molecule": lambda: self._build_page("ask_files"),
            "run": desk.run,
            "stop": desk.stop,
            "ask": lambda: self.question_line.sentence.open_editor("kind"),
            "add": desk.add_question,
            "rename": chooser.rename,
            "duplicate": desk.duplicate,
            "remove": desk.remove_brief,
            "about": self.show_about,
        }

    def _finish_menus(self) -> None:
        actions = self.actions_by_key
        self.recent_menu = QMenu("Open &recent", self)
        self.recent_menu.aboutToShow.connect(self._fill_recent)
        file_menu = actions["open"].associatedObjects()
        for each in file_menu:
            if isinstance(each, QMenu):
                each.insertMenu(actions["demo"], self.recent_menu)
        self.question_line.chooser.set_actions(actions[key] for key in CHOOSER_KEYS)
        actions["build"].setChecked(True)
        actions[self.settings.scheme].setChecked(True)
        actions["redo"].setShortcuts([QKeySequence("Ctrl+Shift+Z"), QKeySequence("Ctrl+Y")])

    def _connect(self) -> None:
        desk = self.desk
        self._patience = QTimer(self, singleShot=True, interval=PATIENCE_MS)
        self._patience.timeout.connect(self._furnish)
        desk.plan_changed.connect(self._plan_came)
        self.segments.chosen.connect(self.show_page)
        desk.begun.connect(self.banner.clear)
        desk.message.connect(self.banner.say)
        desk.casebook_changed.connect(self._refresh_casebook)
        for signal in (desk.casebook_changed, desk.brief_changed, desk.plan_changed, desk.run_changed):
            signal.connect(self._refresh_actions)
        hints = QApplication.styleHints()
        hints.colorSchemeChanged.connect(self._system_scheme_changed)
        self._refresh_actions()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """The first paint of the shell starts the rest."""
        if event.type() == QEvent.Type.Paint and not self._painted:
            self._painted = True
            watched.removeEventFilter(self)
            self._wanted_pages = iter(PAGES)
            QTimer.singleShot(0, self, self._furnish)
        return super().eventFilter(watched, event)

    def _furnish(self) -> None:
        """Make the next page; behind the last one ask for 3-D."""
        name = None if self._ended else next(self._wanted_pages, None)
        if name is not None:
            self.stack.fetch(name, lambda: self._page_came(name))
        elif not self._ended:
            self.three_d.ask()

    def _page_came(self, name: str) -> None:
        if name == PAGES[0]:
            self._begin(self.desk)
            self._patience.start()
        else:
            QTimer.singleShot(0, self, self._furnish)

    def _plan_came(self) -> None:
        """What is asked and its forecast come before the pages that nobody looks at yet."""
        if self._patience.isActive() and self.desk.plan is not None:
            self._patience.start(0)

    @property
    def pages(self) -> dict[str, QWidget]:
        """The pages made so far, by name."""
        return self.stack.made

    @property
    def furnished(self) -> bool:
        """Whether every page is there."""
        return len(self.pages) == len(PAGES)

    # what people do

    def show_page(self, place: int) -> None:
        """Switch to a page, made now where it is not there yet."""
        self.stack.page(PAGES[place])
        self.stack.setCurrentIndex(place)
        self.segments.show_current(place)
        self.actions_by_key[PAGES[place]].setChecked(True)

    def _build_page(self, method: str) -> None:
        self.show_page(0)
        getattr(self.pages["build"], method)()

    def wear(self, scheme: look.Scheme) -> None:
        """Change the colours, and remember them."""
        self.settings.scheme = scheme
        self.actions_by_key[scheme].setChecked(True)
        self._dress()

    def _dress(self) -> None:
        app = QApplication.instance()
        if isinstance(app, QApplication):
            look.wear(app, self.settings.scheme)
        self.plumb_line.refresh()

    def _system_scheme_changed(self, _: Qt.ColorScheme) -> None:
        if self.settings.scheme == "system":
            self._dress()

    def ask_open(self) -> None:
        """Choose a casebook to open."""
        name, _ = QFileDialog.getOpenFileName(self, "Open a casebook", "", CASEBOOKS)
        if name:
            self.open(Path(name))

    def open(self, path: Path) -> None:
        """Open a casebook in place of this one; asks where this one would be lost."""
        self.leaving.replace(lambda: self.desk.open(path))

    def ask_save(self, then: Callable[[], None] | None = None) -> None:
        """Choose where the copy goes."""
        name, _ = QFileDialog.getSaveFileName(self, "Save a copy of the casebook", "", CASEBOOKS)
        if name:
            path = Path(name)
            self.desk.save_copy(path if path.suffix else path.with_suffix(".plumb"), then)

    def ask_export(self) -> None:
        """Choose where the export goes and, by its ending, in which format."""
        kinds = {f"{words} (*{suffix})": suffix for suffix, words in (self.desk.offer.exports or {}).items()}
        name, kind = QFileDialog.getSaveFileName(self, "Export this question", "", ";;".join(kinds))
        if name:
            path = Path(name)
            self.desk.export(path if path.suffix else path.with_suffix(kinds.get(kind, "")))

    def show_about(self) -> QMessageBox:
        """Version, libraries and licences."""
        box = QMessageBox(QMessageBox.Icon.NoIcon, "About Plumbrule", about_text(), parent=self)
        box.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        box.open()
        return box

    # keeping up

    def _refresh_casebook(self) -> None:
        file = self.desk.casebook
        self.setWindowTitle(f"{file.path.name if file.path else 'Unsaved casebook'} \u2013 Plumbrule")
        self.banner.keep("read_only", file.why_read_only)
        self.banner.keep("damage", " ".join(file.damaged), "stop")
        if file.path and file.path != self._remembered:
            self._remembered = file.path
            self.settings.remember(file.path)

    def _refresh_actions(self) -> None:
        desk, actions = self.desk, self.actions_by_key
        file, writes = desk.casebook, not desk.casebook.read_only
        actions["undo"].setText(f"&Undo {file.undo_label}" if file.undo_label else "&Undo")
        actions["redo"].setText(f"&Redo {file.redo_label}" if file.redo_label else "&Redo")
        actions["undo"].setEnabled(writes and file.undo_label is not None)
        actions["redo"].setEnabled(writes and file.redo_label is not None)
        actions["run"].setEnabled(self.question_line.can_run)
        actions["stop"].setEnabled(desk.running and not desk.stopping)
        actions["ask"].setEnabled(writes and bool(desk.brief.species))
        actions["export"].setEnabled(desk.plan is not None and not desk.faults)
        for key in ("paste", "open_molecule", "add", "rename", "duplicate", "remove"):
            actions[key].setEnabled(writes)

    def _fill_recent(self) -> None:
        self.recent_menu.clear()
        for path in self.settings.recent:
            action = self.recent_menu.addAction(path.name)
            action.setToolTip(str(path))
            action.triggered.connect(lambda _=False, each=path: self.open(each))
        if self.recent_menu.isEmpty():
            self.recent_menu.addAction("None yet").setEnabled(False)
        else:
            self.recent_menu.addSeparator()
            self.recent_menu.addAction("Forget these").triggered.connect(self.settings.forget_recent)

    # the end

    def closeEvent(self, event: QCloseEvent) -> None:
        """Ask where something would be lost; else end everything in order."""
        if not self._ended and self.leaving.loses:
            event.ignore()
            self.leaving.ask_to_close(self.leave)
        else:
            self.end()
            event.accept()

    def leave(self) -> None:
        """Close without asking."""
        self.end()
        self.close()

    def end(self) -> None:
        """End pages, the probe and the desk; the window shows nothing new afterwards."""
        if self._ended:
            return
        self._ended = True
        self.settings.geometry = self.saveGeometry()
        self.settings.sync()
        self.hide()  # what still has to be written is written unseen, not in a frozen window
        self.stack.close_pages()
        self.three_d.close()
        self.desk.close()
