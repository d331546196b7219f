"""Every energy as an AtomicResult of the QCSchema, version 1 (MolSSI, https://molssi-qc-schema.readthedocs.io)."""

import json
from typing import Any

from plumbrule_core import __version__
from plumbrule_core.documents.plan import Task
from plumbrule_core.documents.results import Result
from plumbrule_core.documents.species import Species
from plumbrule_core.exports.facts import results_of, species_of
from plumbrule_core.exports.record import Record
from plumbrule_core.units import ANGSTROM_PER_BOHR

PROPERTIES = {"HF": "scf", "MP2": "mp2", "CCSD": "ccsd", "CCSD(T)": "ccsd_prt_pr"}
"""Rungs to what the schema calls their energies."""


class QcSchema:
    """A list with one entry for each species, basis and rung; energies in hartree, coordinates in bohr."""

    suffix = ".json"
    name = "Results for other programs (QCSchema)"

    def write(self, record: Record) -> bytes:
        """The list; `extras` holds what the schema has no word for."""
        entries = [
            _entry(record, species, task, result)
            for species in species_of(record)
            for task, result in results_of(record, species)
        ]
        return (json.dumps(entries, allow_nan=False, indent=1) + "\n").encode()


def _entry(record: Record, species: Species, task: Task, result: Result) -> dict[str, Any]:
    return {
        "schema_name": "qcschema_output",
        "schema_version": 1,
        "id": task.id,
        "molecule": _molecule(species),
        "driver": "energy",
        "model": {"method": task.spec.rung, "basis": task.spec.settings.basis},
        "keywords": task.spec.settings.to_data(),
        "properties": _properties(record, species, task, result),
        "return_result": result.energy,
        "success": result.converged,
        "provenance": {
            "creator": "Plumbrule",
            "version": __version__,
            "routine": f"pyscf {record.versions.get('pyscf', '')}".strip(),
            "wall_time": result.seconds,
            "nthreads": int(result.used.get("threads", "1")),
        },
        "extras": {
            "reference": result.reference,
            "readings": {reading.name: reading.value for reading in result.readings},
            "notes": list(result.notes),
            "used": dict(result.used),
        },
    }


def _molecule(species: Species) -> dict[str, Any]:
    return {
        "schema_name": "qcschema_molecule",
        "schema_version": 2,
        "validated": True,
        "name": species.name,
        "symbols": [atom.symbol for atom in species.atoms],
        "geometry": [
            place / ANGSTROM_PER_BOHR for atom in species.atoms for place in (atom.x, atom.y, atom.z)
        ],
        "molecular_charge": float(species.charge),
        "molecular_multiplicity": species.multiplicity,
        "fix_com": True,
        "fix_orientation": True,
        "provenance": {"creator": "Plumbrule", "version": __version__},
        "comment": species.origin,
    }


def _properties(record: Record, species: Species, task: Task, result: Result) -> dict[str, Any]:
    """The energies that this one stands on, each under the schema's own name."""
    found: dict[str, Any] = {"return_energy": result.energy, "calcinfo_natom": len(species.atoms)}
    below = {*task.needs, task.spec.rung}
    for other, known in results_of(record, species):
        word = PROPERTIES.get(other.spec.rung)
        if other.chain != task.chain or other.spec.rung not in below or word is None:
            continue
        found[f"{word}_total_energy"] = known.energy
        if word == "scf":
            found["scf_iterations"] = known.iterations
        elif known.correlation is not None:
            found[f"{word}_correlation_energy"] = known.correlation
    return found
