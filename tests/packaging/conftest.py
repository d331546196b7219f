import importlib
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from types import ModuleType

import pytest

REPOSITORY = Path(__file__).parents[2]


@pytest.fixture
def load(monkeypatch: pytest.MonkeyPatch) -> Iterator[Callable[[str], ModuleType]]:
    """Imports a script of `packaging/` by its path; that folder is no package."""
    monkeypatch.syspath_prepend(str(REPOSITORY / "packaging"))
    yield importlib.import_module
    for name in ("environment", "start", "check"):
        sys.modules.pop(name, None)


@pytest.fixture
def environment(load: Callable[[str], ModuleType]) -> ModuleType:
    return load("environment")


@pytest.fixture
def copy(tmp_path: Path) -> Path:
    """What the scripts need of the repository: themselves, locks, project, demo and a little core."""
    for name, content in {
        "pyproject.toml": "[project]\nname = 'plumbrule'\n",
        "packaging/lock.txt": "first==1\n",
        "packaging/lock-test.txt": "second==2\n",
        "core/plumbrule_core/__init__.py": "",
        "resources/plumbrule_resources/demo/1_first.toml": "",
        "resources/plumbrule_resources/demo/2_second.toml": "",
    }.items():
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_text(content)
    for script in ("environment", "start", "check"):
        source = REPOSITORY / "packaging" / f"{script}.py"
        (tmp_path / "packaging" / f"{script}.py").write_text(source.read_text())
    return tmp_path
