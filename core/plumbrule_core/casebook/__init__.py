"""The casebook: questions, results, traces and arrays in one SQLite file that survives a power cut."""

from plumbrule_core.casebook.store import BriefEntry, Casebook

__all__ = ["BriefEntry", "Casebook"]
