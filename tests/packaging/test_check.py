import os
from collections.abc import Callable
from pathlib import Path
from types import ModuleType

import pytest

pytestmark = pytest.mark.skipif(os.name == "nt", reason="the stand-in programs are shell scripts")


@pytest.fixture
def check(
    load: Callable[[str], ModuleType], environment: ModuleType, copy: Path, monkeypatch: pytest.MonkeyPatch
) -> ModuleType:
    """check.py in a copy where the environment stands and each tool says its words and fails if told so."""
    tools = copy / ".venv" / "bin"
    tools.mkdir(parents=True)
    for tool in ("ruff", "mypy", "lint-imports", "pytest"):
        (tools / tool).write_text(
            f'#!/bin/sh\necho "{tool} $*"\necho "$OMP_NUM_THREADS $OMP_WAIT_POLICY $QT_QPA_PLATFORM"\n'
            f'case " $FAILING " in *" {tool} "*) exit 3;; esac\n'
        )
        (tools / tool).chmod(0o755)
    module = load("check")
    monkeypatch.setattr(module, "Environment", lambda: environment.Environment(copy))
    monkeypatch.setattr(environment.Environment, "prepare", lambda self, locks: None)
    monkeypatch.setattr(module, "check_libraries", lambda wanted: None)
    for name in ("OMP_NUM_THREADS", "OMP_WAIT_POLICY", "QT_QPA_PLATFORM", "FAILING"):
        monkeypatch.delenv(name, raising=False)
    return module


def _lines(capfd: pytest.CaptureFixture[str], words: str = "") -> list[str]:
    return [line for line in capfd.readouterr().out.splitlines() if line.startswith(words)]


@pytest.mark.parametrize(
    ("words", "tests"),
    [
        (["--fast"], "pytest -m not slow and not window"),
        ([], "pytest -m not slow"),
        (["--all"], "pytest "),
        (["--all", "tests/core", "-x"], "pytest tests/core -x"),
    ],
)
def test_every_stage_runs_and_the_tests_come_last(
    check: ModuleType, capfd: pytest.CaptureFixture[str], words: list[str], tests: str
) -> None:
    assert check.main(words) == 0
    lines = _lines(capfd)
    assert lines[::2] == ["ruff format --check", "ruff check", "mypy ", "lint-imports ", tests]
    assert set(lines[1::2]) == {"1 PASSIVE offscreen"}


@pytest.mark.parametrize(
    ("failing", "status"), [("ruff", 1), ("mypy", 1), ("lint-imports", 1), ("pytest", 3)]
)
def test_one_failing_stage_fails_the_whole_and_keeps_no_other_from_running(
    check: ModuleType,
    capfd: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
    failing: str,
    status: int,
) -> None:
    monkeypatch.setenv("FAILING", failing)
    assert check.main([]) == status
    assert len(_lines(capfd)) == 10


def test_the_tests_own_status_is_returned_where_others_fail_too(
    check: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("FAILING", "mypy pytest")
    assert check.main([]) == 3


def test_what_is_set_outside_holds(
    check: ModuleType, capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("OMP_NUM_THREADS", "2")
    monkeypatch.setenv("QT_QPA_PLATFORM", "xcb")
    assert check.main([]) == 0
    assert set(_lines(capfd, "2")) == {"2 PASSIVE xcb"}


def test_an_environment_that_cannot_be_made_is_said_and_nothing_runs(
    check: ModuleType,
    environment: ModuleType,
    capfd: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def refuse(self: object, locks: list[str]) -> None:
        raise environment.Problem("no network")

    monkeypatch.setattr(environment.Environment, "prepare", refuse)
    assert check.main([]) == 1
    assert capfd.readouterr() == ("", "check.py: no network\n")
