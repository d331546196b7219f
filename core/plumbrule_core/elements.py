"""The elements up to radon, with the few properties that the program needs."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from plumbrule_resources import text


@dataclass(frozen=True, slots=True)
class Element:
    """One element; radii in angstrom, mass in unified atomic mass units."""

    number: int
    symbol: str
    name: str
    mass: float
    covalent_radius: float
    van_der_waals_radius: float
    ground_multiplicity: int

    @property
    def is_transition_metal(self) -> bool:
        """Whether the element stands in groups 3 to 12."""
        return any(first <= self.number <= last for first, last in ((21, 30), (39, 48), (57, 80)))


def _load() -> Mapping[str, Element]:
    rows = json.loads(text("elements.json"))["elements"]
    return MappingProxyType({row["symbol"]: Element(**row) for row in rows})


ELEMENTS: Mapping[str, Element] = _load()
