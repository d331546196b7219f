import tomllib
from pathlib import Path

import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

REPOSITORY = Path(__file__).parents[2]
PROJECT = tomllib.loads((REPOSITORY / "pyproject.toml").read_text())


def _pins(name: str) -> dict[str, str]:
    lines = (REPOSITORY / "packaging" / name).read_text().splitlines()
    found = [Requirement(line) for line in lines if line and not line.startswith("#")]
    assert all(len(one.specifier) == 1 and str(one.specifier).startswith("==") for one in found)
    return {canonicalize_name(one.name): str(one.specifier).removeprefix("==") for one in found}


WANTED = {
    "lock.txt": [
        *PROJECT["project"]["dependencies"],
        *PROJECT["project"]["optional-dependencies"]["desktop"],
        *PROJECT["project"]["optional-dependencies"]["dmrg"],
        *PROJECT["build-system"]["requires"],
    ],
    "lock-test.txt": PROJECT["dependency-groups"]["test"],
}


@pytest.mark.parametrize("name", WANTED)
def test_a_lock_pins_everything_that_the_project_asks_for_as_it_asks(name: str) -> None:
    pins = _pins(name)
    for wanted in map(Requirement, WANTED[name]):
        assert wanted.specifier.contains(pins[canonicalize_name(wanted.name)]), wanted


def test_the_two_locks_agree_where_both_pin_a_package() -> None:
    first, second = _pins("lock.txt"), _pins("lock-test.txt")
    shared = first.keys() & second.keys()
    assert {name: first[name] for name in shared} == {name: second[name] for name in shared}


def test_the_window_library_stays_at_the_version_that_keeps_its_references_on_python_3_11() -> None:
    # PySide6 6.12 gives away a reference to None on every call that returns it (measured on Python 3.11).
    assert _pins("lock.txt")["pyside6-essentials"] == "6.10.3"
