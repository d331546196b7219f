"""What `start.py` and `check.py` share: the private environment, and the libraries that the window needs.

Standard library only, and readable by Pythons older than the program needs, so that they can be told so.
"""

from __future__ import annotations

import ctypes
import hashlib
import importlib.util
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping, Sequence

    Run = Callable[[Sequence[str]], int]

ROOT = Path(__file__).resolve().parent.parent
LOCK = "packaging/lock.txt"
LOCK_TEST = "packaging/lock-test.txt"
OLDEST_PYTHON = (3, 11)

OFFSCREEN = {
    "libEGL.so.1": "libegl1",
    "libGL.so.1": "libgl1",
    "libglib-2.0.so.0": "libglib2.0-0",
    "libdbus-1.so.3": "libdbus-1-3",
    "libfontconfig.so.1": "libfontconfig1",
    "libxkbcommon.so.0": "libxkbcommon0",
}
"""What Qt and VTK load even without a screen, each with its Debian package (measured on a bare Debian 12)."""
ON_A_SCREEN = {
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-shape.so.0": "libxcb-shape0",
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
}
"""What a window on an X screen needs besides (measured on a bare Debian 12)."""

IS_OURS = """
import importlib.util, sys
found = importlib.util.find_spec("plumbrule_core")
sys.exit(found is None or not (found.origin or "").startswith(sys.argv[1]))
"""
"""Run by the environment's Python: is this copy of the program the one that it finds?"""


class Problem(Exception):
    """Something stands in the way; the text says what, and what to do."""


def say(line: str) -> None:
    """One line for the person who waits."""
    print(line, file=sys.stderr, flush=True)


def run(words: Sequence[str]) -> int:
    """Run a command, its output going where ours goes; returns its exit status."""
    return subprocess.run(words, check=False, cwd=ROOT).returncode


def check_python(version: tuple[int, ...] = sys.version_info) -> None:
    """Raise Problem where this Python is too old."""
    if tuple(version[:2]) < OLDEST_PYTHON:
        needed = "{}.{}".format(*OLDEST_PYTHON)
        raise Problem(
            f"Plumbrule needs Python {needed} or newer, and this is Python {version[0]}.{version[1]}. "
            f"Install a newer one and start with it, for example: python{needed} packaging/start.py"
        )


class Environment:
    """The private environment of one copy of the repository, in `.venv`."""

    def __init__(self, root: Path = ROOT, run: Run = run) -> None:
        self.root = root
        self.folder = root / ".venv"
        self._run = run

    def program(self, name: str) -> str:
        """One program of the environment."""
        return str(self.folder / (f"Scripts/{name}.exe" if os.name == "nt" else f"bin/{name}"))

    def prepare(self, locks: Sequence[str]) -> None:
        """Install what the locks name, and this copy of the program, unless that was done before.

        A stamp is written after all else, so that what was interrupted is done again. Raises Problem.
        """
        whole = self._is_ours()
        waiting = [lock for lock in locks if not whole or not self._is_stamped(lock)]
        if not waiting:
            return
        say(f"Setting up {self.folder}: a few minutes and about 3 GB, only now and when packages change ...")
        if not whole:
            self._make()
        for lock in waiting:
            self._install("-r", str(self.root / lock))
        if LOCK in waiting:
            self._install("--no-deps", "--no-build-isolation", "-e", str(self.root))
        for lock in waiting:
            self._stamp(lock).write_text(self._digest(lock), encoding="utf-8")

    def _is_ours(self) -> bool:
        """False where there is none, or one that is half made or of a folder or a Python that is gone."""
        python = self.program("python")
        return Path(python).exists() and self._run([python, "-I", "-c", IS_OURS, str(self.root)]) == 0

    def _is_stamped(self, lock: str) -> bool:
        stamp = self._stamp(lock)
        return stamp.is_file() and stamp.read_text(encoding="utf-8") == self._digest(lock)

    def _stamp(self, lock: str) -> Path:
        return self.folder / f"installed-{Path(lock).name}"

    def _digest(self, lock: str) -> str:
        content = b"\0".join((self.root / name).read_bytes() for name in (lock, "pyproject.toml"))
        return hashlib.sha256(content).hexdigest()

    def _make(self) -> None:
        check_venv(self._run)
        if self._run([sys.executable, "-m", "venv", "--clear", str(self.folder)]) != 0:
            raise Problem(
                f"Python could not make the folder {self.folder}; the lines above say why. Is the disk full, "
                "or the folder write-protected?"
            )

    def _install(self, *what: str) -> None:
        pip = [self.program("python"), "-m", "pip", "install", "--disable-pip-version-check"]
        if self._run([*pip, *what]) != 0:
            raise Problem(
                "The needed packages could not be installed; the lines above say why. Setting up needs the "
                "network and about 3 GB of disk. Start again when both are there."
            )


def is_debian() -> bool:
    """Whether this is Debian or a relative of it."""
    return Path("/etc/debian_version").exists() and shutil.which("apt-get") is not None


def is_root() -> bool:
    """Whether system packages may be installed."""
    return hasattr(os, "geteuid") and os.geteuid() == 0


def has_venv() -> bool:
    """Whether this Python can make an environment; Debian ships that apart."""
    return all(importlib.util.find_spec(name) is not None for name in ("venv", "ensurepip"))


def check_venv(run: Run = run) -> None:
    """Raise Problem where this Python cannot make an environment and it cannot be helped."""
    if has_venv():
        return
    _get_packages(["python3-venv"], "This Python cannot make an environment of its own.", run)
    importlib.invalidate_caches()
    if not has_venv():
        raise Problem(
            f"This Python ({sys.executable}) cannot make an environment even so; start with the system's "
            "own: /usr/bin/python3 packaging/start.py"
        )


def check_libraries(wanted: Mapping[str, str], run: Run = run) -> None:
    """Raise Problem where system libraries are missing and it cannot be helped; Linux alone needs any."""
    gone = missing(wanted) if sys.platform.startswith("linux") else []
    if not gone:
        return
    _get_packages([wanted[name] for name in gone], f"The window needs {', '.join(gone)}.", run)
    still = missing(gone)
    if still:
        raise Problem(f"These system libraries cannot be loaded even so: {', '.join(still)}.")


def missing(libraries: Iterable[str]) -> list[str]:
    """Those of the libraries that cannot be loaded."""
    return [name for name in libraries if not _loads(name)]


def _loads(name: str) -> bool:
    try:
        ctypes.CDLL(name)
    except OSError:
        return False
    return True


def _get_packages(packages: Sequence[str], why: str, run: Run) -> None:
    """Install system packages as root on Debian; else raise Problem with the line that does."""
    install = ["apt-get", "install", "--no-install-recommends", *packages]
    line = " ".join(install)
    if not is_debian():
        raise Problem(f"{why} On Debian it comes with `{line}`; install the same for this system.")
    if not is_root():
        raise Problem(f"{why} Install what is missing, then start again:\n\n    sudo {line}\n")
    say(f"{why} Installing {', '.join(packages)} ...")
    quietly = ["env", "DEBIAN_FRONTEND=noninteractive"]
    if run([*quietly, "apt-get", "update", "-qq"]) != 0 or run([*quietly, *install, "-y", "-qq"]) != 0:
        raise Problem(f"{why} It could not be installed; is there a network? The line is: {line}")
