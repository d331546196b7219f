"""Density functionals: rungs for comparison, each one registration."""

from dataclasses import dataclass

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.costs import field_forecast
from plumbrule_core.rungs.hartree_fock import field_arrays, field_used, removed_functions
from plumbrule_core.rungs.molecule import empty_mean_field
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.scf.solve import solve

GRID_LEVEL = 4
"""PySCF's grid level: 90 radial shells of up to 590 points for atoms of the first row, pruned."""
POINTS_PER_ATOM = 20_000
"""Grid points of an atom at that level, about."""
KURTH = "S. Kurth et al., Int. J. Quantum Chem. 75, 889 (1999), basis-set limit, from memory"


@dataclass(kw_only=True, eq=False)
class Functional:
    """A Kohn-Sham rung made of a functional's name in libxc, its grid level and its citation."""

    name: str
    xc: str
    says: str
    rank: int
    citation: str
    published: tuple[Published, ...]
    kind: Kind = "density functional"
    needs: tuple[str, ...] = ()
    single_reference: bool = True

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """A field, and the integration over the grid."""
        return field_forecast(size, machine, grid_points=POINTS_PER_ATOM * size.atoms)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """Converge to a minimum; nothing is left on the bench for the wave-function rungs."""
        field = empty_mean_field(given, functional=self.xc)
        field.grids.level = GRID_LEVEL
        solved = solve(field, given, tell, functional=True)
        reference = "UKS" if field.istype("UKS") else "ROKS" if field.istype("ROKS") else "RKS"
        points = len(field.grids.weights) if field.grids.weights is not None else 0
        return Outcome(
            energy=float(field.e_tot),
            reference=reference,
            iterations=solved.iterations,
            notes=(*solved.notes, *removed_functions(field)),
            used={
                **field_used(given, field, solved),
                "functional": f"{self.xc} in libxc, no dispersion correction",
                "grid": f"level {GRID_LEVEL} of 9, {points} points, pruned",
            },
            arrays=field_arrays(field),
        )


PBE = Functional(
    name="PBE",
    xc="pbe",
    says="A gradient-corrected functional without fitted parameters: quick, for comparison.",
    rank=0,
    citation="J. P. Perdew, K. Burke and M. Ernzerhof, Phys. Rev. Lett. 77, 3865 (1996)",
    published=(
        Published(
            xyz="He 0 0 0",
            basis="aug-cc-pVQZ",
            energy=-2.8929,
            atol=3e-4,
            source=KURTH,
        ),
        Published(
            xyz="H 0 0 0",
            basis="aug-cc-pVQZ",
            energy=-0.49999,
            atol=1e-4,
            multiplicity=2,
            source=KURTH,
        ),
    ),
)
B3LYP = Functional(
    name="B3LYP",
    xc="b3lypg",
    says="The most used hybrid functional: a familiar number to compare with.",
    rank=1,
    citation="P. J. Stephens et al., J. Phys. Chem. 98, 11623 (1994)",
    published=(
        Published(
            xyz="H 0 0 0",
            basis="6-31G*",
            energy=-0.500273,
            atol=2e-5,
            multiplicity=2,
            source="energy of the atom as tables of thermochemistry print it, from memory",
        ),
        Published(
            xyz="O 0 0 0\nH 0 -0.757 0.587\nH 0 0.757 0.587",
            basis="6-31G",
            energy=-76.384929,
            atol=5e-5,
            source="PySCF's own test of water (a grid of 50 by 194 points; ours is larger), looked up",
        ),
    ),
)
M06_2X = Functional(
    name="M06-2X",
    xc="m06-2x",
    says="A hybrid functional fitted to main-group thermochemistry and barriers.",
    rank=2,
    citation="Y. Zhao and D. G. Truhlar, Theor. Chem. Acc. 120, 215 (2008)",
    published=(
        Published(
            xyz="H 0 0 0",
            basis="aug-cc-pVQZ",
            energy=-0.5,
            atol=2e-3,
            multiplicity=2,
            source="exact energy; the tolerance is the functional's own error (own value)",
        ),
        Published(
            xyz="He 0 0 0",
            basis="aug-cc-pVQZ",
            energy=-2.903724,
            atol=2e-3,
            source="exact energy, C. L. Pekeris, Phys. Rev. 115, 1216 (1959), from memory; as above",
        ),
    ),
)
