"""The style sheet: shapes and spacing of standard widgets, with the colours of one scheme."""

from collections.abc import Mapping
from string import Template

from plumbrule_resources import icon, text


def sheet(shades: Mapping[str, str], icons: str) -> str:
    """The style sheet with these colours by name; `icons` ends the icons' names, `light` or `dark`."""
    pictures = {name: icon(f"{name}_{icons}").as_posix() for name in ("down", "up", "check")}
    return Template(text("window.qss")).substitute({**shades, **pictures})
