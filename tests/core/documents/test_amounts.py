"""Sizes are decimal, as the International System of Units has it, and said alike by every part."""

import pytest

from plumbrule_core.documents.amounts import gigabytes, memory
from plumbrule_core.documents.plan import Machine
from plumbrule_core.headless.forecast import machine_data


@pytest.mark.parametrize(
    ("megabytes", "said"),
    [
        (0.2, "0 MB"),
        (120, "120 MB"),
        (999.4, "999 MB"),
        (999.6, "1.0 GB"),
        (1200, "1.2 GB"),
        (24576, "24.6 GB"),
    ],
)
def test_a_size_from_a_thousand_megabytes_on_is_said_in_gigabytes(megabytes: float, said: str) -> None:
    assert memory(megabytes) == said


def test_the_command_says_the_machine_as_the_window_does() -> None:
    data = machine_data(Machine(cores=2, memory_mb=24576.0, disk_mb=50000.0))
    assert (data["memory_gb"], data["disk_gb"]) == (gigabytes(24576), 50.0)
