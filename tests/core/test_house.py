"""The walls of the house: who may load whom, and that nothing was forgotten in a list."""

import re
import subprocess
import sys
from pathlib import Path

import pytest

import plumbrule_core
import plumbrule_desktop

CORE, DESKTOP = (Path(package.__file__).parent for package in (plumbrule_core, plumbrule_desktop))


def loaded_after(statement: str) -> set[str]:
    """The top-level modules that a fresh process holds after the statement."""
    code = f"import sys; {statement}; print(' '.join(sorted({{name.split('.')[0] for name in sys.modules}})))"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=120
    )
    return set(done.stdout.split())


def modules_of(folder: Path, package: str) -> list[str]:
    """Every importable module below a package folder."""
    found = []
    for path in sorted(folder.rglob("*.py")):
        parts = [package, *path.relative_to(folder).with_suffix("").parts]
        if parts[-1] == "__main__":
            continue
        found.append(".".join(parts[:-1] if parts[-1] == "__init__" else parts))
    return found


def test_all_of_the_core_together_loads_no_qt():
    everything = "; ".join(f"import {name}" for name in modules_of(CORE, "plumbrule_core"))
    assert not loaded_after(everything) & {"PySide6", "shiboken6", "pyqtgraph", "vtkmodules", "vtk"}


def test_all_of_the_desktop_together_loads_no_pyscf():
    everything = "; ".join(f"import {name}" for name in modules_of(DESKTOP, "plumbrule_desktop"))
    assert "pyscf" not in loaded_after(everything)


def test_the_session_loads_no_heavy_library():
    heavy = {"pyscf", "rdkit", "scipy", "h5py", "matplotlib", "PySide6"}
    assert not loaded_after("import plumbrule_core.session") & heavy


@pytest.mark.parametrize(
    ("package", "mark"),
    [
        ("rungs", "    single_reference = "),
        ("exports", "    suffix = "),
        ("judgement.rules", "\nRULES"),
        ("judgement.readings", " = Family("),
    ],
)
def test_every_file_that_defines_one_is_in_the_one_list(package, mark):
    folder = CORE.joinpath(*package.split("."))
    init = (folder / "__init__.py").read_text()
    defining = [path for path in folder.glob("*.py") if path.stem != "__init__" and mark in path.read_text()]
    assert len(defining) >= 5
    for path in defining:
        assert re.search(rf"\b{path.stem}\b", init), f"{path.name} is in no list"


def test_no_module_is_longer_than_four_hundred_lines():
    long = {
        path.name: count
        for folder in (CORE, DESKTOP)
        for path in folder.rglob("*.py")
        if (count := len(path.read_text().splitlines())) > 400
    }
    assert not long


def test_nothing_is_unpickled_or_evaluated():
    banned = ("import pickle", "pickle.load", "allow_pickle=True", "eval(", "yaml.load(")
    found = [
        (path.name, word)
        for folder in (CORE, DESKTOP)
        for path in folder.rglob("*.py")
        for word in banned
        if word in path.read_text().replace("_eval(", "").replace(".eval(", "")
    ]
    assert not found
