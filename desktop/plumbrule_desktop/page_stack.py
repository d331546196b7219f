"""The four pages in one stack, each made when it is first wanted."""

from collections.abc import Callable
from importlib import import_module

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QStackedWidget, QWidget

from plumbrule_desktop.scene.three_d import ThreeD
from plumbrule_desktop.state.clerk import Clerk
from plumbrule_desktop.state.desk import Desk

PAGES = ("build", "watch", "judge", "report")
_HOMES = {
    "build": ("plumbrule_desktop.pages.build.page", "BuildPage"),
    "watch": ("plumbrule_desktop.pages.watch", "WatchPage"),
    "judge": ("plumbrule_desktop.pages.judge", "JudgePage"),
    "report": ("plumbrule_desktop.pages.report", "ReportPage"),
}
"""Module and class of each page."""


class PageStack(QStackedWidget):
    """The pages by name; making one imports what only it needs."""

    page_wanted = Signal(str)
    """A page asks for another one to be shown."""
    demo_wanted = Signal()
    """A page asks for the demo."""

    def __init__(self, desk: Desk, three_d: ThreeD, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.desk = desk
        self.three_d = three_d
        self._clerk = Clerk("plumbrule-pages", self)
        self.made: dict[str, QWidget] = {}
        self._empty = {name: QWidget() for name in PAGES}
        for empty in self._empty.values():
            self.addWidget(empty)

    def page(self, name: str) -> QWidget:
        """The page of that name, made now where it is not there yet."""
        if name not in self.made:
            page = self._make(name)
            self.made[name] = page
            for asked in ("page_wanted", "demo_wanted"):
                if hasattr(page, asked):
                    getattr(page, asked).connect(getattr(self, asked))
            self._put(page, PAGES.index(name), self._empty.pop(name))
        return self.made[name]

    def fetch(self, name: str, then: Callable[[], None]) -> None:
        """Import in a thread what the page needs, make the page, and call `then`."""

        def make(_: object) -> None:
            self.page(name)
            then()

        self._clerk.do(lambda: import_module(_HOMES[name][0]), make)

    def _make(self, name: str) -> QWidget:
        module, kind = _HOMES[name]
        given = (self.desk, self.three_d) if name == "build" else (self.desk,)
        made: QWidget = getattr(import_module(module), kind)(*given)
        return made

    def _put(self, page: QWidget, place: int, empty: QWidget) -> None:
        current = self.currentIndex()
        self.insertWidget(place, page)
        self.removeWidget(empty)
        empty.deleteLater()
        self.setCurrentIndex(current)

    def close_pages(self) -> None:
        """Let every page give back what it holds."""
        self._clerk.close()
        for page in self.made.values():
            page.close()
