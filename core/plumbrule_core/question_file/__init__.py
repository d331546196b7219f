"""QUESTION.toml: read into a brief with all of its faults, and written so that it runs again."""

from plumbrule_core.question_file.reading import Draft, read_draft, read_question
from plumbrule_core.question_file.writing import write_question

__all__ = ["Draft", "read_draft", "read_question", "write_question"]
