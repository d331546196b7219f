"""The limits are the published ones, each with its source, and each is used."""

from pathlib import Path

import pytest

import plumbrule_core.judgement
from plumbrule_core.judgement.thresholds import THRESHOLDS

PUBLISHED = [
    ("t1_closed", 0.02, "Lee and Taylor"),  # check value D10
    ("t1_open", 0.044, "Rienstra-Kiracofe"),  # D11
    ("d1", 0.05, "Janssen and Nielsen"),  # D12
    ("d2", 0.18, "Nielsen and Janssen"),  # D13
    ("t1_metal", 0.05, "Jiang"),  # D14, looked up: abstract of J. Chem. Theory Comput. 8, 460 (2012)
    ("d1_metal", 0.15, "Jiang"),
    ("tae_moderate", 5.0, "Karton"),  # D15
    ("tae_severe", 10.0, "Karton"),
    ("m_large", 0.1, "Tishchenko"),  # D18
    ("c0_squared", 0.9, "Lee, Rice, Scuseria and Schaefer"),  # SCIENCE, Thresholds
]


@pytest.mark.parametrize(("name", "value", "source"), PUBLISHED)
def test_a_published_limit_keeps_its_value_and_its_source(name: str, value: float, source: str) -> None:
    assert THRESHOLDS[name].value == value
    assert source in THRESHOLDS[name].source


def test_every_limit_says_how_sure_it_is_and_is_used_somewhere() -> None:
    code = "".join(path.read_text() for path in Path(plumbrule_core.judgement.__file__).parent.rglob("*.py"))
    for name, limit in THRESHOLDS.items():
        assert limit.sure
        assert f'"{name}"' in code, f"{name} is never used"
