"""The background core of Plumbrule: documents, rungs, engine, judgement, reports, headless command."""

__version__ = "0.1.0"
