"""The real window and the real desk, closed in order after each test."""

import threading
from collections.abc import Callable, Iterator

import pytest
from PySide6.QtCore import QCoreApplication, QEvent
from shiboken6 import isValid

from plumbrule_core.documents.species import Atom, Species
from plumbrule_desktop import look
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

LONG = 60_000


def molecule(name: str, lines: str, charge: int = 0, multiplicity: int = 1) -> Species:
    """A species from atom lines in angstrom."""
    atoms = tuple(
        Atom(symbol=symbol, x=float(x), y=float(y), z=float(z))
        for symbol, x, y, z in (line.split() for line in lines.strip().splitlines())
    )
    return Species(name=name, atoms=atoms, charge=charge, multiplicity=multiplicity)


@pytest.fixture
def water() -> Species:
    """Water."""
    return molecule("water", "O 0 0 0.117\nH 0 0.757 -0.469\nH 0 -0.757 -0.469")


@pytest.fixture
def hydrogen() -> Species:
    """H2 at 1.4 bohr."""
    return molecule("dihydrogen", "H 0 0 0\nH 0 0 0.740848")


@pytest.fixture
def hydrazine() -> Species:
    """Hydrazine, roughly."""
    return molecule(
        "hydrazine",
        "N -0.62 0.35 -0.1\nN 0.62 -0.35 -0.1\nH -1.25 0.02 0.6\nH -0.45 1.33 0.12\n"
        "H 1.25 0 0.58\nH 0.45 -1.33 0.12",
    )


@pytest.fixture(autouse=True)
def nothing_left_behind(qapp: object) -> Iterator[None]:
    """A test fails for threads of ours that it leaves running."""
    yield
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    left = [thread.name for thread in threading.enumerate() if thread.name.startswith("plumbrule")]
    assert not left


@pytest.fixture
def desk(qapp: object) -> Iterator[Desk]:
    """A desk over nothing; the test opens a casebook."""
    made = Desk()
    yield made
    made.close()


@pytest.fixture
def fresh_desk(qtbot, desk: Desk) -> Desk:
    """A desk over an unsaved casebook with one empty question."""
    desk.new()
    qtbot.waitUntil(lambda: desk.plan is not None, timeout=LONG)
    return desk


@pytest.fixture
def open_window(qtbot, qapp) -> Iterator[Callable[..., Window]]:
    """Opens a window, waits until every page and the casebook are there, and closes it after the test."""
    opened: list[Window] = []
    look.wear(qapp, "light")

    def make(begin: Callable[[Desk], None] = Desk.new) -> Window:
        window = Window(Settings(), begin)
        opened.append(window)
        window.show()
        window.activateWindow()
        qtbot.waitUntil(lambda: window.furnished and window.desk.plan is not None, timeout=LONG)
        return window

    yield make
    for window in filter(isValid, opened):
        if window.desk.running:
            window.desk.stop()
            qtbot.waitUntil(lambda window=window: not window.desk.running, timeout=LONG)
        window.leave()
        window.deleteLater()


@pytest.fixture
def window(open_window: Callable[..., Window]) -> Window:
    """A window over an unsaved casebook with one empty question."""
    return open_window()
