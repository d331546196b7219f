"""What this process may really use: the machine's cores and memory within what a container allows."""

import math
import os
from collections.abc import Iterator
from pathlib import Path

import psutil

_ROOT = Path("/sys/fs/cgroup")


def usable_cores() -> int:
    """Physical cores, or fewer where the process is bound to fewer."""
    cores = psutil.cpu_count(logical=False) or psutil.cpu_count() or 1
    if hasattr(os, "sched_getaffinity"):
        cores = min(cores, len(os.sched_getaffinity(0)))
    quotas = [quota for group in _groups("cpu") if (quota := _quota(group)) is not None]
    return max(1, min([cores, *quotas]))


def usable_memory_mb() -> float:
    """Memory that can be had now without swapping, in MB."""
    free = [float(psutil.virtual_memory().available)]
    for group in _groups("memory"):
        limit = _number(group / "memory.max", group / "memory.limit_in_bytes")
        used = _number(group / "memory.current", group / "memory.usage_in_bytes")
        if limit is not None and used is not None:
            free.append(limit - used + _reclaimable(group))
    return max(0.0, min(free)) / 2**20


def _groups(controller: str) -> Iterator[Path]:
    """The control groups of this process, innermost first (cgroups(7)); none where the system has none."""
    try:
        lines = Path("/proc/self/cgroup").read_text().splitlines()
    except OSError:
        return
    for line in lines:
        _, controllers, inside = line.split(":", 2)
        if controllers and controller not in controllers.split(","):
            continue
        root = _ROOT / controller if controllers else _ROOT
        group = root / inside.lstrip("/")
        for folder in (group, *group.parents):
            if folder == _ROOT.parent or not folder.is_relative_to(root):
                break
            yield folder


def _quota(group: Path) -> int | None:
    """Whole cores that a group may use, or None without a limit."""
    try:
        allowed, period = (group / "cpu.max").read_text().split()
        return None if allowed == "max" else max(1, math.floor(int(allowed) / int(period)))
    except (OSError, ValueError):
        pass
    allowed_us, period_us = _number(group / "cpu.cfs_quota_us"), _number(group / "cpu.cfs_period_us")
    if not allowed_us or not period_us or allowed_us < 0:
        return None
    return max(1, math.floor(allowed_us / period_us))


def _reclaimable(group: Path) -> float:
    """File cache that the kernel gives back when memory is needed."""
    try:
        lines = (group / "memory.stat").read_text().splitlines()
    except OSError:
        return 0.0
    facts = dict(line.split(" ", 1) for line in lines if " " in line)
    return float(facts.get("total_inactive_file", facts.get("inactive_file", 0)))


def _number(*files: Path) -> float | None:
    """The number in the first of these files that holds one."""
    for file in files:
        try:
            return float(file.read_text())
        except (OSError, ValueError):
            continue
    return None
