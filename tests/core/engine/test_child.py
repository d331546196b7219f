"""How a worker process is started: from source or frozen, in an environment that runs nobody else's code."""

import os
import sys
from pathlib import Path

import plumbrule_core
from plumbrule_core.engine import LocalExecutor, Order, cache, child, executor, hearing


def test_from_source_the_worker_is_a_module_and_the_users_folder_is_not_on_its_path():
    assert child.worker_command() == (sys.executable, "-P", "-m", "plumbrule_core.engine.worker")


def test_in_a_frozen_bundle_the_program_itself_becomes_the_worker(monkeypatch):
    monkeypatch.setattr(sys, "frozen", True, raising=False)
    assert child.worker_command() == (sys.executable, "--worker")


def test_import_paths_hold_wherever_the_worker_stands(monkeypatch, tmp_path, order):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("PYTHONPATH", f"core{os.pathsep}/elsewhere")
    variables = child.environment(order(), tmp_path)
    assert variables["PYTHONPATH"].split(os.pathsep) == [str(tmp_path / "core"), "/elsewhere"]


def test_an_order_without_tasks_loads_the_library_and_ends(order, heard):
    handle = LocalExecutor().submit(order(), heard, heard.end)
    assert handle.wait(60)
    assert heard.endings == ["done"]
    (hello,) = heard.events
    assert hello.versions["pyscf"].startswith("2.14")


def test_code_that_lies_in_the_users_folders_is_not_run(order, heard, tmp_path, monkeypatch):
    trap = f"open({str(tmp_path / 'sprung')!r}, 'w').close()\n"
    for name in (".pyscf_conf.py", "json.py", "numpy.py", "extension.py"):
        (tmp_path / name).write_text(trap)
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("PYSCF_EXT_PATH", str(tmp_path / "extension.py"))
    monkeypatch.setenv("PYTHONPATH", str(Path(plumbrule_core.__file__).parents[1]))
    assert LocalExecutor().submit(order(), heard, heard.end).wait(60)
    assert heard.endings == ["done"]
    assert not (tmp_path / "sprung").exists()


def test_a_relative_cache_folder_is_made_absolute(monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("PLUMBRULE_CACHE", "here")
    assert cache.cache_folder() == tmp_path / "here"


def test_a_supervisor_that_breaks_ends_the_worker_and_says_so(fake, task, order, heard, monkeypatch, caplog):
    def breaks(self, line):
        raise RecursionError("too deep")

    monkeypatch.setattr(hearing.Hearing, "hear", breaks)
    handle = fake.submit(order(task("absorbed")), heard, heard.end)
    assert handle.wait(5)
    assert heard.endings == ["failed"]
    assert heard.reasons() == ["the worker's messages could not be read any more: too deep"]
    assert "the reading of a worker's messages broke" in caplog.text


def test_an_end_is_told_even_where_the_supervision_itself_breaks(
    fake, task, order, heard, monkeypatch, caplog
):
    def breaks(self, order):
        raise RuntimeError("no")

    monkeypatch.setattr(executor.Child, "send", breaks)
    handle = fake.submit(order(task("quick")), heard, heard.end)
    assert handle.wait(5)
    assert heard.endings == ["failed"]
    assert heard.reasons() == ["the supervision of the worker broke: no"]
    assert "the supervision of a worker broke" in caplog.text


def test_an_order_is_one_line_and_comes_back_as_it_was(task, order):
    job = order(task("quick"), threads=3)
    assert "\n" not in job.to_json()
    assert Order.from_json(job.to_json()) == job
