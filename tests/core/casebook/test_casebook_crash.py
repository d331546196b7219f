import shutil
import signal
import subprocess
import sys
import textwrap
from pathlib import Path

import pytest

from plumbrule_core.casebook import Casebook

WRITER = """
    import io, sys, pathlib
    import numpy as np
    from plumbrule_core.casebook import Casebook
    from plumbrule_core.documents.brief import Brief
    from plumbrule_core.documents.results import Result

    book = Casebook.open(pathlib.Path(sys.argv[1]))
    for n in range(1_000_000):
        file = io.BytesIO()
        np.save(file, np.full(500, float(n)))
        ref = book.put_array(file.getvalue())
        book.put_result(Result(task=f"t{n}", species="water", rung="HF", basis="cc-pVDZ", level="l",
            energy=-float(n), seconds=1.0, memory_mb=1.0, reference="RHF", arrays={"a": ref}))
        book.add_brief(Brief(title=str(n)), f"Add {n}")
        print(n, flush=True)
"""


@pytest.fixture
def cut_short(tmp_path: Path) -> tuple[Path, int]:
    """A casebook whose writer was killed in the middle, and the last piece that it said was finished."""
    path = tmp_path / "cut.plumb"
    with subprocess.Popen(
        [sys.executable, "-c", textwrap.dedent(WRITER), str(path)], stdout=subprocess.PIPE, text=True
    ) as writer:
        assert writer.stdout is not None
        for line in writer.stdout:
            if int(line) >= 25:
                break
        writer.send_signal(signal.SIGKILL if sys.platform != "win32" else signal.SIGTERM)
        last = max([int(line), *(int(rest) for rest in writer.stdout)])
    return path, last


def _check(path: Path, last: int) -> None:
    with Casebook.open(path) as book:
        assert not book.read_only
        assert book.damaged == ()
        results = book.results()
        assert list(results)[: last + 1] == [f"t{n}" for n in range(last + 1)]
        assert len(results) <= last + 2
        for n, one in enumerate(results.values()):
            assert one.energy == -float(n)
            assert (book.array(one.arrays["a"]) == n).all()
        titles = [entry.brief.title for entry in book.briefs()]
        assert titles[: last + 1] == [str(n) for n in range(last + 1)]
        assert book.undo() == f"Add {titles[-1]}"
    assert [one.name for one in path.parent.iterdir() if one.name.startswith(path.name)] == [path.name]


def test_a_casebook_whose_writer_was_killed_opens_for_writing_with_all_that_was_finished(
    cut_short: tuple[Path, int],
) -> None:
    _check(*cut_short)


def test_file_and_log_copied_after_a_power_cut_open_with_all_that_was_finished(
    cut_short: tuple[Path, int],
) -> None:
    path, last = cut_short
    elsewhere = path.parent / "elsewhere"
    elsewhere.mkdir()
    for suffix in ("", "-wal"):
        shutil.copy(path.with_name(path.name + suffix), elsewhere)
    _check(elsewhere / path.name, last)


@pytest.mark.parametrize("tenths", [0, 3, 7, 9])
def test_a_log_torn_in_its_middle_opens_with_what_came_before_the_tear(
    cut_short: tuple[Path, int], tenths: int
) -> None:
    path, last = cut_short
    log = path.with_name(path.name + "-wal")
    log.write_bytes(log.read_bytes()[: log.stat().st_size * tenths // 10])
    with Casebook.open(path) as book:
        assert book.damaged == ()
        results = book.results()
        assert list(results) == [f"t{n}" for n in range(len(results))]
        assert len(results) <= last + 1
        assert all((book.array(one.arrays["a"]) == n).all() for n, one in enumerate(results.values()))
