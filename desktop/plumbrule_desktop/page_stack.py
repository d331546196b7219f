"""The four pages in one stack, each made when it is first wanted."""

from collections.abc import Callable

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QStackedWidget, QWidget

from plumbrule_desktop.scene.three_d import ThreeD
from plumbrule_desktop.state.desk import Desk

PAGES = ("build", "watch", "judge", "report")


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
        self.made: dict[str, QWidget] = {}
        self._empty = {name: QWidget() for name in PAGES}
        for empty in self._empty.values():
            self.addWidget(empty)

    def page(self, name: str) -> QWidget:
        """The page of that name, made now where it is not there yet."""
        if name not in self.made:
            page = _MAKE[name](self)
            self.made[name] = page
            for asked in ("page_wanted", "demo_wanted"):
                if hasattr(page, asked):
                    getattr(page, asked).connect(getattr(self, asked))
            self._put(page, PAGES.index(name), self._empty.pop(name))
        return self.made[name]

    def _put(self, page: QWidget, place: int, empty: QWidget) -> None:
        current = self.currentIndex()
        self.insertWidget(place, page)
        self.removeWidget(empty)
        empty.deleteLater()
        self.setCurrentIndex(current)

    def close_pages(self) -> None:
        """Let every page give back what it holds."""
        for page in self.made.values():
            page.close()


def _build(stack: PageStack) -> QWidget:
    from plumbrule_desktop.pages.build.page import BuildPage

    return BuildPage(stack.desk, stack.three_d)


def _watch(stack: PageStack) -> QWidget:
    from plumbrule_desktop.pages.watch import WatchPage

    return WatchPage(stack.desk)


def _judge(stack: PageStack) -> QWidget:
    from plumbrule_desktop.pages.judge import JudgePage

    return JudgePage(stack.desk)


def _report(stack: PageStack) -> QWidget:
    from plumbrule_desktop.pages.report import ReportPage

    return ReportPage(stack.desk)


_MAKE: dict[str, Callable[[PageStack], QWidget]] = {
    "build": _build,
    "watch": _watch,
    "judge": _judge,
    "report": _report,
}
