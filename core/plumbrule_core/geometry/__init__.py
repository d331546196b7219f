"""Geometries: read from files and pasted text, written, and looked over before a run (`geometry.shape`)."""

from plumbrule_core.geometry.reading import from_smiles, read_file, read_text, write

__all__ = ["from_smiles", "read_file", "read_text", "write"]
