import ast
import os
import shutil
import subprocess
import sys
import venv
from collections.abc import Callable, Sequence
from pathlib import Path
from types import ModuleType

import pytest

REPOSITORY = Path(__file__).parents[2]
LOCKS = ["packaging/lock.txt", "packaging/lock-test.txt"]


class Machine:
    """Stands for a computer on which every command works, but for the one whose words hold `fails`."""

    def __init__(self, root: Path) -> None:
        self.root = root
        self.said: list[str] = []
        self.fails = "\0"

    def __call__(self, words: Sequence[str]) -> int:
        line = " ".join(words)
        folder = self.root / ".venv"
        if "find_spec" in line:
            return 0 if (folder / "ours").exists() else 1
        self.said.append(line.replace(f"{self.root}{os.sep}", "").replace(str(self.root), "."))
        if self.fails in line:
            return 1
        if "-m venv" in line:
            shutil.rmtree(folder, ignore_errors=True)
            (folder / "bin").mkdir(parents=True)
            (folder / "bin" / "python").touch()
        if " -e " in line:
            (folder / "ours").touch()
        return 0

    def installed(self) -> list[str]:
        """What was installed since this was last asked."""
        lines, self.said = self.said, []
        return [line.rpartition("--disable-pip-version-check ")[2] for line in lines]


@pytest.fixture
def machine(copy: Path) -> Machine:
    return Machine(copy)


@pytest.fixture
def prepare(environment: ModuleType, machine: Machine) -> Callable[..., None]:
    return lambda *locks: environment.Environment(machine.root, machine).prepare(list(locks))


needs_posix = pytest.mark.skipif(os.name == "nt", reason="the stand-in environment has POSIX folders")


@needs_posix
def test_the_first_start_makes_the_environment_and_the_second_does_nothing(
    prepare: Callable[..., None], machine: Machine
) -> None:
    prepare(LOCKS[0])
    made, *installed = machine.installed()
    assert made == f"{sys.executable} -m venv --clear .venv"
    assert installed == ["-r packaging/lock.txt", "--no-deps --no-build-isolation -e ."]
    prepare(LOCKS[0])
    assert machine.installed() == []


@needs_posix
def test_checking_after_starting_adds_the_test_tools_alone(
    prepare: Callable[..., None], machine: Machine
) -> None:
    prepare(LOCKS[0])
    machine.installed()
    prepare(*LOCKS)
    assert machine.installed() == ["-r packaging/lock-test.txt"]
    prepare(LOCKS[0])
    assert machine.installed() == []


@needs_posix
@pytest.mark.parametrize("changed", ["packaging/lock.txt", "pyproject.toml"])
def test_a_changed_lock_or_project_is_installed_again(
    prepare: Callable[..., None], machine: Machine, changed: str
) -> None:
    prepare(LOCKS[0])
    machine.installed()
    with (machine.root / changed).open("a") as file:
        file.write("# changed\n")
    prepare(LOCKS[0])
    assert machine.installed() == ["-r packaging/lock.txt", "--no-deps --no-build-isolation -e ."]


@needs_posix
@pytest.mark.parametrize("fails", ["-m venv", "-r ", " -e "])
def test_what_was_interrupted_is_said_and_done_again(
    prepare: Callable[..., None], machine: Machine, environment: ModuleType, fails: str
) -> None:
    machine.fails = fails
    with pytest.raises(environment.Problem, match="the lines above say why"):
        prepare(LOCKS[0])
    machine.fails = "\0"
    machine.installed()
    prepare(LOCKS[0])
    assert machine.installed()[-2:] == ["-r packaging/lock.txt", "--no-deps --no-build-isolation -e ."]


@needs_posix
def test_an_environment_that_is_not_of_this_folder_is_made_anew(
    prepare: Callable[..., None], machine: Machine
) -> None:
    prepare(*LOCKS)
    machine.installed()
    (machine.root / ".venv" / "ours").unlink()
    prepare(*LOCKS)
    made, *installed = machine.installed()
    assert "--clear" in made
    assert installed == [
        "-r packaging/lock.txt",
        "-r packaging/lock-test.txt",
        "--no-deps --no-build-isolation -e .",
    ]


def test_a_python_that_is_too_old_is_told_so(environment: ModuleType) -> None:
    with pytest.raises(environment.Problem, match=r"needs Python 3\.11 or newer, and this is Python 3\.10"):
        environment.check_python((3, 10, 14))
    environment.check_python((3, 11, 0))
    environment.check_python((4, 0, 0))


@pytest.mark.parametrize("script", ["environment", "start", "check"])
def test_a_python_that_is_too_old_can_read_far_enough_to_be_told(script: str) -> None:
    source = (REPOSITORY / "packaging" / f"{script}.py").read_text()
    tree = ast.parse(source, feature_version=(3, 8))
    outside = {
        name
        for node in tree.body
        for name in (
            [alias.name for alias in node.names]
            if isinstance(node, ast.Import)
            else [str(node.module)]
            if isinstance(node, ast.ImportFrom)
            else []
        )
    }
    assert {name.partition(".")[0] for name in outside} <= {*sys.stdlib_module_names, "environment"}


GONE = {"libplumbrule-nowhere.so.7": "libnowhere7", "libplumbrule-neither.so.1": "libneither1"}


@pytest.fixture
def linux(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> Callable[[bool, bool], None]:
    def be(debian: bool, root: bool) -> None:
        monkeypatch.setattr(sys, "platform", "linux")
        monkeypatch.setattr(environment, "is_debian", lambda: debian)
        monkeypatch.setattr(environment, "is_root", lambda: root)

    return be


def _never(words: Sequence[str]) -> int:
    raise AssertionError(f"ran {words}")


def test_missing_libraries_are_named_with_the_one_line_that_installs_them(
    environment: ModuleType, linux: Callable[[bool, bool], None]
) -> None:
    linux(True, False)
    line = "sudo apt-get install --no-install-recommends libnowhere7 libneither1"
    with pytest.raises(environment.Problem, match=line) as told:
        environment.check_libraries(GONE, _never)
    assert all(name in str(told.value) for name in GONE)


def test_on_another_linux_the_missing_libraries_are_named_without_a_promise(
    environment: ModuleType, linux: Callable[[bool, bool], None]
) -> None:
    linux(False, True)
    with pytest.raises(environment.Problem, match=r"libplumbrule-nowhere\.so\.7.*the same for this system"):
        environment.check_libraries(GONE, _never)


def test_root_on_debian_has_the_missing_libraries_installed(
    environment: ModuleType, linux: Callable[[bool, bool], None], monkeypatch: pytest.MonkeyPatch
) -> None:
    linux(True, True)
    there: set[str] = {"libplumbrule-neither.so.1"}
    monkeypatch.setattr(environment, "_loads", lambda name: name in there)
    ran: list[str] = []

    def run(words: Sequence[str]) -> int:
        ran.append(" ".join(words))
        if "install" in words:
            there.update(GONE)
        return 0

    environment.check_libraries(GONE, run)
    quietly = "env DEBIAN_FRONTEND=noninteractive apt-get"
    assert ran == [f"{quietly} update -qq", f"{quietly} install --no-install-recommends libnowhere7 -y -qq"]


def test_libraries_that_root_cannot_install_are_said(
    environment: ModuleType, linux: Callable[[bool, bool], None]
) -> None:
    linux(True, True)
    with pytest.raises(environment.Problem, match="is there a network"):
        environment.check_libraries(GONE, lambda words: 100)
    with pytest.raises(environment.Problem, match="cannot be loaded even so"):
        environment.check_libraries(GONE, lambda words: 0)


def test_libraries_that_are_there_are_left_alone(
    environment: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sys, "platform", "linux")
    monkeypatch.setattr(environment, "_loads", lambda name: True)
    environment.check_libraries(GONE, _never)
    monkeypatch.setattr(sys, "platform", "darwin")
    monkeypatch.setattr(environment, "_loads", lambda name: False)
    environment.check_libraries(GONE, _never)


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="sonames are those of Linux")
def test_a_library_is_known_by_loading_it(environment: ModuleType) -> None:
    assert environment.missing(["libc.so.6", "libplumbrule-nowhere.so.7"]) == ["libplumbrule-nowhere.so.7"]


def test_a_python_without_venv_asks_for_the_package_that_brings_it(
    environment: ModuleType, linux: Callable[[bool, bool], None], monkeypatch: pytest.MonkeyPatch
) -> None:
    linux(True, False)
    monkeypatch.setattr(environment, "has_venv", lambda: False)
    with pytest.raises(environment.Problem, match=r"sudo apt-get install .* python3-venv"):
        environment.check_venv(_never)
    linux(True, True)
    with pytest.raises(environment.Problem, match=r"/usr/bin/python3 packaging/start\.py"):
        environment.check_venv(lambda words: 0)
    answers = iter((False, True))
    monkeypatch.setattr(environment, "has_venv", lambda: next(answers))
    environment.check_venv(lambda words: 0)


@pytest.mark.parametrize(
    ("variables", "platform", "screen"),
    [
        ({}, "linux", False),
        ({"DISPLAY": ""}, "linux", False),
        ({"DISPLAY": ":0"}, "linux", True),
        ({"WAYLAND_DISPLAY": "wayland-0"}, "linux", True),
        ({}, "darwin", True),
        ({}, "win32", True),
    ],
)
def test_only_linux_starts_without_a_screen(
    load: Callable[[str], ModuleType], variables: dict[str, str], platform: str, screen: bool
) -> None:
    assert load("start").has_screen(variables, platform) is screen


def test_an_x_screen_needs_more_libraries_than_none(
    load: Callable[[str], ModuleType], environment: ModuleType
) -> None:
    start = load("start")
    assert start.libraries_for({"WAYLAND_DISPLAY": "w"}) == environment.OFFSCREEN
    assert start.libraries_for({"DISPLAY": ":0"}) == {**environment.OFFSCREEN, **environment.ON_A_SCREEN}


def test_with_a_screen_the_window_opens_on_the_demo_and_without_a_question_is_answered(
    load: Callable[[str], ModuleType], environment: ModuleType, copy: Path
) -> None:
    start, here = load("start"), environment.Environment(copy)
    program = here.program("plumbrule")
    assert start.command(here, True) == [program, "--demo"]
    first = str(copy / "resources/plumbrule_resources/demo/1_first.toml")
    assert start.command(here, False) == [program, "run", first]
    shutil.rmtree(copy / "resources")
    with pytest.raises(environment.Problem, match="no demo question"):
        start.command(here, False)


def _start(copy: Path, *words: str, **variables: str) -> subprocess.CompletedProcess[str]:
    kept = {key: value for key, value in os.environ.items() if key not in ("DISPLAY", "WAYLAND_DISPLAY")}
    return subprocess.run(
        [sys.executable, str(copy / "packaging" / "start.py"), *words],
        env={**kept, **variables},
        capture_output=True,
        text=True,
        check=False,
        timeout=120,
    )


@needs_posix
@pytest.mark.parametrize("words", [[], ["--headless"]])
def test_a_prepared_copy_starts_at_once_and_hands_over_with_the_programs_own_status(
    copy: Path, environment: ModuleType, words: list[str]
) -> None:
    venv.create(copy / ".venv", symlinks=True, with_pip=False)
    (site,) = (copy / ".venv" / "lib").glob("python*/site-packages")
    (site / "here.pth").write_text(str(copy / "core"))
    here = environment.Environment(copy)
    here._stamp(LOCKS[0]).write_text(here._digest(LOCKS[0]))
    program = Path(here.program("plumbrule"))
    program.write_text('#!/bin/sh\necho "$@"\nexit 5\n')
    program.chmod(0o755)
    done = _start(copy, *words)
    assert done.stdout == f"run {copy}/resources/plumbrule_resources/demo/1_first.toml\n"
    assert "Setting up" not in done.stderr
    assert done.returncode == 5


@needs_posix
def test_without_the_network_the_start_ends_with_a_sentence_and_leaves_no_stamp(copy: Path) -> None:
    done = _start(copy, "--headless", PIP_NO_INDEX="1")
    assert done.returncode == 1
    assert "start.py: The needed packages could not be installed" in done.stderr
    assert "network" in done.stderr
    assert "Traceback" not in done.stderr
    assert not (copy / ".venv" / "installed-lock.txt").exists()
