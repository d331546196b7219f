"""All species as frames of one XYZ file."""

from plumbrule_core.documents.species import Species
from plumbrule_core.exports.facts import species_of
from plumbrule_core.exports.record import Record


class FramesXyz:
    """Coordinates in angstrom; charge and multiplicity stand in the comment lines."""

    suffix = ".xyz"
    name = "Coordinates of all species"

    def write(self, record: Record) -> bytes:
        """One frame for each species, fragments included."""
        return "".join(_frame(species) for species in species_of(record)).encode()


def _frame(species: Species) -> str:
    name = " ".join(species.name.split())
    comment = f"charge={species.charge} multiplicity={species.multiplicity} {name}"
    atoms = (f"{a.symbol:<2} {a.x:18.10f} {a.y:18.10f} {a.z:18.10f}" for a in species.atoms)
    return "\n".join((str(len(species.atoms)), comment, *atoms)) + "\n"
