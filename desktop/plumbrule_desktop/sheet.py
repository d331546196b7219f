"""The style sheet: shapes and spacing of standard widgets, with the colours of one scheme."""

from string import Template
from typing import TYPE_CHECKING

from plumbrule_resources import icon, text

if TYPE_CHECKING:
    from plumbrule_desktop.look import Colours


def sheet(colours: "Colours", icons: str) -> str:
    """The style sheet of one scheme; `icons` is the ending of the icons' names, `light` or `dark`."""
    shades = {name: getattr(colours, name) for name in colours.__slots__}
    pictures = {name: icon(f"{name}_{icons}").as_posix() for name in ("down", "up", "check")}
    return Template(text("window.qss")).substitute(shades | pictures)
