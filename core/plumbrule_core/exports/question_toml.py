"""The question as a file that runs again."""

from plumbrule_core.exports.record import Record
from plumbrule_core.question_file import write_question


class QuestionToml:
    """The question file, geometries inline."""

    suffix = ".toml"
    name = "Question file that runs again"

    def write(self, record: Record) -> bytes:
        """The question with its species and its recipe."""
        return write_question(record.brief).encode()
