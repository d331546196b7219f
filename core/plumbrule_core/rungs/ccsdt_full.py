"""CCSDT: triple excitations to infinite order, for small molecules."""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.full_triples import full_triples, iterate_triples, triple_integrals
from plumbrule_core.rungs.correlated.iterations import usable
from plumbrule_core.rungs.correlated.reference import (
    NO_PAIRS,
    correlated_counts,
    correlated_used,
    has_pairs,
    reference_name,
)
from plumbrule_core.rungs.correlated.triples_prices import triples_memory_mb, whole_triples_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    FLUORIDE_ALL,
    FLUORIDE_FROZEN,
    HYDROGEN,
    NITROGEN_FROZEN,
    WATER_OLSEN,
    WATER_STRETCHED,
)


class CCSDT:
    """Spin-restricted on RHF, spin-unrestricted on UHF and on ROHF (whose determinant is kept)."""

    name = "CCSDT"
    says = "Triples to infinite order: a check on (T) for small molecules, many times its price."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF",)
    rank = 50
    single_reference = True
    citation = (
        "J. Noga and R. J. Bartlett, J. Chem. Phys. 86, 7041 (1987); G. E. Scuseria and H. F. Schaefer, "
        "Chem. Phys. Lett. 152, 382 (1988)"
    )
    published: tuple[Published, ...] = (
        HYDROGEN.gives(-1.137276),
        WATER_OLSEN.gives(-76.241367, atol=2e-6),
        WATER_STRETCHED.slowly().gives(-75.953070),
        FLUORIDE_FROZEN.gives(-100.0194112692 - 0.2088251983),
        FLUORIDE_ALL.gives(-100.0194112692 - 0.2107685032),
        NITROGEN_FROZEN.slowly().gives(-108.9537962409 - 0.3217858675),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Iterations with o^3 v^5 operations each."""
        return whole_triples_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy; leaves the CCSDT object with its amplitudes on the bench, converged or not."""
        bench = given.bench
        bench.full_triples = None
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        refuse_beyond(given)
        stored = usable(given)
        notes = [] if stored is None else [f"carried on from iteration {int(stored['iterations'])}"]
        for note in notes:
            tell.note(note)
        solver = full_triples(given)
        iterations = iterate_triples(given, tell, solver, triple_integrals(solver, given), stored)
        bench.full_triples = solver
        if not solver.converged:
            notes.append(f"CCSDT did not converge in {iterations.done} iterations")
        return Outcome(
            energy=energy + float(solver.e_corr),
            reference=reference,
            correlation=float(solver.e_corr),
            converged=bool(solver.converged),
            iterations=iterations.done,
            notes=tuple(notes),
            used={**used, "amplitude tolerance": f"{solver.conv_tol_normt:g}"},
        )


def refuse_beyond(given: Given) -> None:
    """Raise PlumbruleError, with the count of triples, where they do not fit into the memory allowed."""
    (occupied, _), (virtual, _) = correlated_counts(given.bench)
    unrestricted = given.bench.mean_field.istype("UHF") or given.bench.mean_field.istype("ROHF")
    needed = triples_memory_mb(occupied, virtual, unrestricted)
    if needed > given.memory_mb:
        raise PlumbruleError(
            f"CCSDT of {given.spec.species.name} has {occupied**3 * virtual**3 / 6:.1e} triple excitations "
            f"and needs about {needed / 1000:.3g} GB of memory, but {given.memory_mb / 1000:.3g} GB are "
            "allowed: choose CCSD(T), or a smaller basis"
        )
