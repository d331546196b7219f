"""Question files and a private cache for the tests of the command."""

import shutil
from pathlib import Path

import pytest

from plumbrule_core.engine import machine
from plumbrule_core.headless import main

H2 = """
[question]
kind = "bond"
within = 4.0
unit = "kJ/mol"
species = "h2"
cut = [1, 2]

[species.h2]
xyz = '''
H 0 0 0
H 0 0 0.7408481
'''

[recipe]
basis = "STO-3G"
"""

WATER = """
[question]
kind = "energy"
within = 4.0

[species.water]
xyz = '''
O 0 0 0.1178
H 0 0.7555 -0.4712
H 0 -0.7555 -0.4712
'''

[recipe]
basis = "aug-cc-pVTZ"
"""


@pytest.fixture(scope="session")
def calibration(tmp_path_factory):
    """The speed of this machine, measured once for all tests."""
    cache = tmp_path_factory.mktemp("calibration")
    machine(cache)
    return cache / "machine.json"


@pytest.fixture(autouse=True)
def private_cache(tmp_path, monkeypatch, calibration):
    cache = tmp_path / "cache"
    cache.mkdir()
    shutil.copy(calibration, cache)
    monkeypatch.setenv("PLUMBRULE_CACHE", str(cache))


@pytest.fixture
def h2(tmp_path):
    path = tmp_path / "h2.toml"
    path.write_text(H2)
    return path


@pytest.fixture
def water(tmp_path):
    path = tmp_path / "water.toml"
    path.write_text(WATER)
    return path


@pytest.fixture(scope="session")
def computed(tmp_path_factory, calibration):
    """A casebook with the bond question answered, computed once; tests work on copies."""
    folder = tmp_path_factory.mktemp("computed")
    (folder / "h2.toml").write_text(H2)
    shutil.copy(calibration, folder)
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("PLUMBRULE_CACHE", str(folder))
        words = ["run", str(folder / "h2.toml"), "--casebook", str(folder / "case.plumb"), "--threads", "1"]
        assert main(words) == 0
    return folder / "case.plumb"


@pytest.fixture
def book(tmp_path, computed):
    """A copy of the computed casebook."""
    return Path(shutil.copy(computed, tmp_path / "case.plumb"))
