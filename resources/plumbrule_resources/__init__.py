"""Data that Plumbrule ships: elements, basis sets, thresholds, sentences, demo questions, icons."""

from importlib.resources import files
from pathlib import Path


def text(name: str) -> str:
    """The text of one shipped file, by its path below this package."""
    return files(__name__).joinpath(name).read_text(encoding="utf-8")


def demo_questions() -> tuple[Path, ...]:
    """The demo's question files, in the order in which the demo casebook shows them."""
    return tuple(sorted(Path(str(files(__name__))).joinpath("demo").glob("*.toml")))


def icon(name: str) -> Path:
    """The path of one shipped icon, as `down_light` (SVG)."""
    return Path(str(files(__name__))) / "icons" / f"{name}.svg"
