"""CCSD: single and double excitations, and all their products."""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.correlated.iterations import iterate, usable
from plumbrule_core.rungs.correlated.reference import NO_PAIRS, correlated_used, has_pairs, reference_name
from plumbrule_core.rungs.correlated.solvers import coupled_cluster, integrals
from plumbrule_core.rungs.costs import iterated_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    AMIDOGEN,
    BORANE_CATION,
    FLUORIDE_ALL,
    FLUORIDE_FROZEN,
    HELIUMS,
    HYDROGEN,
    WATER_DIFFUSE,
    WATER_OLSEN,
    WATER_STRETCHED,
)


class CCSD:
    """Spin-restricted on RHF, spin-unrestricted on UHF and on ROHF (whose determinant is kept)."""

    name = "CCSD"
    says = "Pairs of electrons correlated to infinite order: the ground on which (T) stands."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF",)
    rank = 30
    single_reference = True
    citation = "G. D. Purvis and R. J. Bartlett, J. Chem. Phys. 76, 1910 (1982)"
    published: tuple[Published, ...] = (
        WATER_OLSEN.gives(-76.238116),
        WATER_STRETCHED.gives(-75.929633),
        HYDROGEN.gives(-1.137276),
        FLUORIDE_FROZEN.gives(-100.0194112692 - 0.2068152041),
        FLUORIDE_ALL.gives(-100.0194112692 - 0.208743643),
        WATER_DIFFUSE.gives(-76.0413815332 - 0.2271733453),
        AMIDOGEN.gives(-55.5751380525 - 0.1716495276),
        BORANE_CATION.gives(-25.9451384287 - 0.0811710557),
        HELIUMS.gives(3 * -2.8875948311),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Transformation and iterations."""
        return iterated_forecast(size, machine, iterations=15 if size.unrestricted else 12)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy; leaves the CCSD object with its amplitudes on the bench, converged or not."""
        bench = given.bench
        bench.coupled_cluster = bench.perturbation = None
        reference, energy = reference_name(bench), float(bench.mean_field.e_tot)
        if not has_pairs(bench):
            used = correlated_used(given)
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        stored = usable(given)
        notes = [] if stored is None else [f"carried on from iteration {int(stored['iterations'])}"]
        for note in notes:
            tell.note(note)
        solver = coupled_cluster(given)
        iterations = iterate(given, tell, solver, integrals(given), stored)
        bench.coupled_cluster = solver
        if not solver.converged:
            notes.append(f"CCSD did not converge in {iterations.done} iterations")
        return Outcome(
            energy=energy + float(solver.e_corr),
            reference=reference,
            correlation=float(solver.e_corr),
            converged=bool(solver.converged),
            iterations=iterations.done,
            notes=tuple(notes),
            used={**correlated_used(given), "amplitude tolerance": f"{solver.conv_tol_normt:g}"},
        )
