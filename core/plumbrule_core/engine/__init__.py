"""The engine: worker processes that compute the tasks of a plan, and the events they send."""

from plumbrule_core.engine.blobs import load_array
from plumbrule_core.engine.cache import blob_folder, cache_folder, shelf_folder
from plumbrule_core.engine.calibration import machine
from plumbrule_core.engine.executor import Executor, Handle, LocalExecutor
from plumbrule_core.engine.order import Order
from plumbrule_core.engine.run import Run, run_plan

__all__ = [
    "Executor",
    "Handle",
    "LocalExecutor",
    "Order",
    "Run",
    "blob_folder",
    "cache_folder",
    "load_array",
    "machine",
    "run_plan",
    "shelf_folder",
]
