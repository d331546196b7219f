"""The active space on the Build page: plain words, and shown where a rung works in one."""

from plumbrule_core.documents.recipe import ActiveSpace
from plumbrule_core.documents.species import Species
from plumbrule_desktop.pages.build.page import BuildPage
from plumbrule_desktop.state import asking, changes
from plumbrule_desktop.window import Window

LONG = 60_000


def settled(qtbot, window: Window) -> None:
    done: list[bool] = []
    window.desk._clerk.do(lambda: None, lambda _: done.append(True))
    qtbot.waitUntil(lambda: bool(done) and window.desk.plan is not None, timeout=LONG)


def test_an_active_space_is_proposed_or_set_in_plain_words(qtbot, window: Window, water: Species) -> None:
    window.desk.add_species((water,), "Paste")
    window.desk.edit(asking.asked(window.desk.brief, "energy"), "Ask")
    settled(qtbot, window)
    page = window.pages["build"]
    assert isinstance(page, BuildPage)
    space = page.recipe.space
    assert not space.isVisibleTo(page)
    assert "Active space" not in page.recipe.ladder.cards
    window.desk.edit(changes.set_recipe("rungs", ["HF", "TCCSD(T)"]), "Add TCCSD(T)")
    settled(qtbot, window)
    assert space.isVisibleTo(page)
    assert not space.counts.isVisibleTo(page)
    assert "Active space" not in page.recipe.ladder.cards
    space.choice.setCurrentIndex(space.choice.findData("set"))
    space.choice.activated.emit(space.choice.currentIndex())
    settled(qtbot, window)
    assert space.counts.isVisibleTo(page)
    space.orbitals.setValue(4)
    space.electrons.setValue(4)
    settled(qtbot, window)
    asked = window.desk.brief.recipe.active_space
    assert asked == ActiveSpace(choice="set", electrons=4, count=4)
    assert not window.desk.faults
    space.electrons.setValue(3)
    settled(qtbot, window)
    assert "3 active electrons do not fit" in space.fault.text()
    space.choice.setCurrentIndex(space.choice.findData("propose"))
    space.choice.activated.emit(space.choice.currentIndex())
    settled(qtbot, window)
    assert window.desk.brief.recipe.active_space == ActiveSpace()
    assert not space.counts.isVisibleTo(page)
