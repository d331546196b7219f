"""Data that Plumbrule ships: elements, basis sets, thresholds, sentences, demo questions, icons."""

from importlib.resources import files


def text(name: str) -> str:
    """The text of one shipped file, by its path below this package."""
    return files(__name__).joinpath(name).read_text(encoding="utf-8")
