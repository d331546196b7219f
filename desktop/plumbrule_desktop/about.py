"""What Help says about the program."""

from importlib.metadata import PackageNotFoundError, version

LIBRARIES = (
    ("PySide6-Essentials", "Qt for Python", "LGPL-3.0"),
    ("vtk", "VTK", "BSD-3-Clause"),
    ("pyqtgraph", "pyqtgraph", "MIT"),
    ("pyscf", "PySCF", "Apache-2.0"),
    ("rdkit", "RDKit", "BSD-3-Clause"),
    ("numpy", "NumPy", "BSD-3-Clause"),
    ("pydantic", "pydantic", "MIT"),
)


def about_text() -> str:
    """Version, purpose, the libraries with their licences, and the caution that belongs to every number."""
    lines = "\n".join(f"{name} {_version(package)} \u2013 {licence}" for package, name, licence in LIBRARIES)
    return (
        f"Plumbrule {_version('plumbrule')}\n\n"
        "Sets up, runs and checks correlated calculations, and says whether the number can be trusted.\n\n"
        "A calculation does not replace measurement. Where a number bears on safety, follow your local rules "
        "and ask a qualified person.\n\n"
        f"Plumbrule is under the Apache License 2.0. It stands on:\n{lines}"
    )


def _version(package: str) -> str:
    try:
        return version(package)
    except PackageNotFoundError:
        return "(not installed)"
