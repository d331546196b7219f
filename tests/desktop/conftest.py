"""Every window of the tests: without a screen where there is none, without the person's own settings."""

import os
from pathlib import Path

import pytest

if not os.environ.get("DISPLAY"):
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    os.environ.setdefault("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")


HERE = Path(__file__).parent


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """The offscreen platform says at every window what it lacks; that is no fault of ours."""
    for item in items:
        if HERE in item.path.parents:
            item.add_marker(pytest.mark.qt_log_ignore("This plugin does not support"))


@pytest.fixture(scope="session")
def kept_cache(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """One cache for the session, so that the machine is measured once."""
    return tmp_path_factory.mktemp("cache")


@pytest.fixture(autouse=True)
def own_settings(tmp_path: Path, kept_cache: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Settings and cache of the test alone; nothing swings."""
    monkeypatch.setenv("PLUMBRULE_SETTINGS", str(tmp_path / "settings.ini"))
    monkeypatch.setenv("PLUMBRULE_CACHE", str(kept_cache))
    monkeypatch.setenv("PLUMBRULE_STILL", "1")
