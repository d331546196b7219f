"""The limits that the rules compare readings with, each with its value, its source and how sure it is."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from plumbrule_resources import text


@dataclass(frozen=True, slots=True)
class Threshold:
    """One limit; `sure` says whether it was looked up, is from memory, computed, or a rule of thumb."""

    value: float
    source: str
    sure: str
    unit: str = ""


def _load() -> Mapping[str, Threshold]:
    data = json.loads(text("thresholds.json"))
    sources = data["sources"]
    return MappingProxyType(
        {
            name: Threshold(row["value"], sources[row["source"]], row["sure"], row.get("unit", ""))
            for name, row in data["thresholds"].items()
        }
    )


THRESHOLDS: Mapping[str, Threshold] = _load()
