"""The systems that rungs are checked on: geometry, basis and source; each rung's file holds its energies.

`check` names the entry in the collection of check values that came with the specification.
"""

from dataclasses import dataclass, replace
from typing import Literal

from plumbrule_core.rungs.protocol import Published
from plumbrule_core.units import ANGSTROM_PER_BOHR

OWN = "own reference value, PySCF 2.14.0"
OLSEN = "J. Olsen et al., J. Chem. Phys. 104, 8007 (1996), doi 10.1063/1.471518"
SZABO = "A. Szabo and N. S. Ostlund, Modern Quantum Chemistry, three decimals there, recomputed to six"


@dataclass(frozen=True, slots=True, kw_only=True)
class System:
    """Everything of a published value but the energy."""

    xyz: str
    basis: str
    source: str
    check: str
    atol: float
    charge: int = 0
    multiplicity: int = 1
    core: Literal["frozen", "all"] = "all"
    cartesian: bool = False
    slow: bool = False

    def gives(self, energy: float, atol: float | None = None) -> Published:
        """The published total energy of one rung, in hartree."""
        return Published(
            xyz=self.xyz,
            basis=self.basis,
            energy=energy,
            atol=atol or self.atol,
            source=self.source,
            check=self.check,
            charge=self.charge,
            multiplicity=self.multiplicity,
            core=self.core,
            cartesian=self.cartesian,
            slow=self.slow,
        )

    def slowly(self) -> "System":
        """The same, for a test that takes long."""
        return replace(self, slow=True)


def from_bohr(atoms: str) -> str:
    """Atom lines in bohr, parted by semicolons, as lines in angstrom."""
    lines = []
    for atom in atoms.split(";"):
        symbol, *position = atom.split()
        lines.append(" ".join([symbol, *(f"{float(x) * ANGSTROM_PER_BOHR:.10f}" for x in position)]))
    return "\n".join(lines)


WATER_OLSEN = System(
    xyz=from_bohr("O 0 0 -0.0090; H 0 1.515263 -1.058898; H 0 -1.515263 -1.058898"),
    basis="cc-pVDZ",
    source=OLSEN,
    check="F02",
    atol=1e-6,
)
WATER_STRETCHED = System(
    xyz=from_bohr("O 0 0 -0.0180; H 0 3.030526 -2.117796; H 0 -3.030526 -2.117796"),
    basis="cc-pVDZ",
    source=OLSEN,
    check="F05",
    atol=2e-6,
)
HYDROGEN = System(
    xyz=from_bohr("H 0 0 0; H 0 0 1.4"), basis="STO-3G", source=SZABO, check="C01, C02, C03", atol=1e-6
)
FLUORIDE_FROZEN = System(
    xyz="H 0 0 0\nF 0 0 0.917", basis="cc-pVDZ", source=OWN, check="F15", atol=1e-7, core="frozen"
)
FLUORIDE_ALL = System(xyz="H 0 0 0\nF 0 0 0.917", basis="cc-pVDZ", source=OWN, check="F16", atol=1e-7)
WATER_DIFFUSE = System(
    xyz="O 0 0 0\nH 0.958 0 0\nH -0.2398640439 0 0.9274854395",
    basis="aug-cc-pVDZ",
    source=OWN,
    check="F17",
    atol=1e-7,
    core="frozen",
)
AMIDOGEN = System(
    xyz="N 0 0 0\nH 1.008 0 0\nH -0.2608895975 0 0.9736532329",
    basis="aug-cc-pVDZ",
    source=OWN,
    check="F18",
    atol=1e-7,
    multiplicity=2,
    core="frozen",
)
BORANE_CATION = System(
    xyz="B 0 0 0.10369114\nH 0 0 -1.13269886\nH 0 0.37149 3.0\nH 0 -0.37149 3.0",
    basis="cc-pVDZ",
    source=OWN,
    check="F25",
    atol=1e-7,
    charge=1,
    multiplicity=2,
    core="frozen",
)
NITROGEN_FROZEN = System(
    xyz="N 0 0 0\nN 0 0 1.1",
    basis="cc-pVDZ",
    source="reference value in the library's own source, PySCF 2.14.0",
    check="",
    atol=1e-7,
    core="frozen",
)
HELIUMS = System(
    xyz="He 0 0 0\nHe 0 0 100\nHe 0 100 0",
    basis="cc-pVDZ",
    source="size extensivity: three far atoms against one, PySCF 2.14.0 for the atom",
    check="A06",
    atol=1e-7,
)
AMIDOGEN_SMALL = System(
    xyz="N 0 0 0\nH 1.013 0 0\nH -0.2313190064 0 0.9862358985",
    basis="6-31G",
    source=OWN,
    check="F12",
    atol=1e-6,
    multiplicity=2,
    core="frozen",
)
HELIUMS_TWO = System(xyz=from_bohr("He 0 0 -5; He 0 0 5"), basis="6-31G", source=OWN, check="F13", atol=1e-8)
WATER_SIX_D = System(
    xyz=from_bohr("O 0 0 0; H 0 1.43055071 1.10725140; H 0 -1.43055071 1.10725140"),
    basis="6-31G**",
    source=SZABO,
    check="C11",
    atol=1e-6,
    cartesian=True,
)
WATER_SIX_D_LONG = System(
    xyz="O 0 0 0\nH 1.0 0 0\nH -0.2266513074 0 0.9739759673",
    basis="6-31G**",
    source=OWN,
    check="A01",
    atol=2e-7,
    cartesian=True,
)
OXYGEN = System(xyz="O 0 0 0\nO 0 0 1.1", basis="cc-pVTZ", source=OWN, check="C13", atol=1e-7, multiplicity=3)
_AMMONIA = (
    "N 0 0 0; H 1.77222735 0 0.72026331; H -0.88611367 1.53479390 0.72026331; "
    "H -0.88611367 -1.53479390 0.72026331"
)
_METHANE = (
    "C 0 0 0; H 1.18356805 1.18356805 1.18356805; H 1.18356805 -1.18356805 -1.18356805; "
    "H -1.18356805 1.18356805 -1.18356805; H -1.18356805 -1.18356805 1.18356805"
)
_MINIMAL = (
    ("C05", "O 0 0 0; H 0 1.43055071 1.10725140; H 0 -1.43055071 1.10725140", -74.962940),
    ("C06", _AMMONIA, -55.454071),
    ("C07", _METHANE, -39.726853),
    ("C08", "F 0 0 0; H 0 0 1.733", -98.570787),
    ("C09", "N 0 0 0; N 0 0 2.074", -107.495842),
    ("C10", "C 0 0 0; O 0 0 2.132", -111.224580),
)
MINIMAL: tuple[Published, ...] = tuple(
    System(xyz=from_bohr(atoms), basis="STO-3G", source=SZABO, check=check, atol=2e-6).gives(energy)
    for check, atoms, energy in _MINIMAL
)
