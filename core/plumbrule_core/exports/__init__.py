"""Exports: one file a format; EXPORTS is the one list."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Protocol

from plumbrule_core.exports.files import save
from plumbrule_core.exports.frames_xyz import FramesXyz
from plumbrule_core.exports.html import ReportHtml
from plumbrule_core.exports.qcschema import QcSchema
from plumbrule_core.exports.question_toml import QuestionToml
from plumbrule_core.exports.record import Record
from plumbrule_core.exports.table_csv import TableCsv

__all__ = ["EXPORTS", "Exporter", "Record", "save"]


class Exporter(Protocol):
    """One format that a record can be written in."""

    suffix: str
    name: str
    """What it is, in words for a file dialog."""

    def write(self, record: Record) -> bytes:
        """The whole file."""


_ALL: tuple[Exporter, ...] = (ReportHtml(), TableCsv(), QcSchema(), FramesXyz(), QuestionToml())
EXPORTS: Mapping[str, Exporter] = MappingProxyType({exporter.suffix: exporter for exporter in _ALL})
