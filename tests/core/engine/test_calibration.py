"""What the machine offers is measured once, checked when read, and bounded by what a container allows."""

import numpy as np
import psutil
import pytest

from plumbrule_core.engine import LocalExecutor, calibration, limits, machine


def test_a_machine_is_measured_once_and_then_read(tmp_path, monkeypatch):
    first = machine(tmp_path)
    assert 1 <= first.cores <= psutil.cpu_count()
    assert 100 < first.memory_mb <= psutil.virtual_memory().total / 2**20
    assert first.disk_mb > 0
    assert 1e-3 < first.seconds_per_gigaflop < 5
    assert 0.1 < first.start_seconds < 60
    monkeypatch.setattr(calibration, "seconds_per_gigaflop", lambda: pytest.fail("measured again"))
    second = machine(tmp_path)
    assert second.seconds_per_gigaflop == first.seconds_per_gigaflop
    assert second.start_seconds == first.start_seconds


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"{",
        b'{"computer": "another", "seconds_per_gigaflop": 0.1, "start_seconds": 1.0}',
        b'{"computer": "x", "seconds_per_gigaflop": -1, "start_seconds": 1.0}',
        b'{"computer": "x", "seconds_per_gigaflop": "__import__", "start_seconds": 1.0}',
    ],
)
def test_a_calibration_that_is_damaged_or_of_another_computer_is_measured_again(
    tmp_path, monkeypatch, content
):
    monkeypatch.setattr(calibration, "seconds_per_gigaflop", lambda: 0.125)
    monkeypatch.setattr(calibration, "_start_seconds", lambda: 2.0)
    (tmp_path / "machine.json").write_bytes(content)
    assert machine(tmp_path).seconds_per_gigaflop == 0.125
    assert b"0.125" in (tmp_path / "machine.json").read_bytes()


def test_another_numpy_is_another_calibration(monkeypatch):
    before = calibration._computer()
    monkeypatch.setattr(np, "__version__", "99.0")
    assert calibration._computer() != before


def test_a_worker_that_cannot_start_is_not_remembered_as_a_fast_one(tmp_path, monkeypatch):
    monkeypatch.setattr(calibration, "LocalExecutor", lambda: LocalExecutor(("/nowhere/worker",)))
    monkeypatch.setattr(calibration, "seconds_per_gigaflop", lambda: 0.1)
    assert machine(tmp_path).start_seconds == 1.5
    assert not (tmp_path / "machine.json").exists()


@pytest.fixture
def group(tmp_path, monkeypatch):
    """A control group of our own: writes its files and points the reader there."""
    monkeypatch.setattr(limits, "_groups", lambda controller: iter([tmp_path]))

    def make(**files):
        for name, text in files.items():
            (tmp_path / name.replace("__", ".")).write_text(text)

    return make


def test_memory_is_what_a_container_leaves(group):
    group(
        memory__max="1073741824\n",
        memory__current="536870912\n",
        memory__stat="inactive_file 104857600\nfile 5\n",
    )
    assert limits.usable_memory_mb() == pytest.approx(612)


def test_memory_limits_of_the_older_kind_are_read_too(group):
    group(
        memory__limit_in_bytes="1073741824\n",
        memory__usage_in_bytes="536870912\n",
        memory__stat="inactive_file 1\ntotal_inactive_file 104857600\n",
    )
    assert limits.usable_memory_mb() == pytest.approx(612)


def test_without_a_limit_memory_is_that_of_the_machine(group):
    group(memory__max="max\n", memory__current="536870912\n")
    assert limits.usable_memory_mb() == pytest.approx(psutil.virtual_memory().available / 2**20, rel=0.2)


@pytest.mark.parametrize(
    "files",
    [
        {"cpu__max": "100000 100000\n"},
        {"cpu__max": "50000 100000\n"},
        {"cpu__cfs_quota_us": "150000", "cpu__cfs_period_us": "100000"},
    ],
)
def test_a_share_of_the_processor_counts_in_whole_cores(group, files):
    group(**files)
    assert limits.usable_cores() == 1


def test_an_unlimited_share_is_no_limit(group):
    without = limits.usable_cores()
    group(cpu__max="max 100000\n", cpu__cfs_quota_us="-1", cpu__cfs_period_us="100000")
    assert limits.usable_cores() == without
