"""TCCSD: CCSD in which the strongly correlated electrons are treated exactly."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

from plumbrule_core.correlation.settling import RULE, settled, spread
from plumbrule_core.correlation.tailored import Tailored
from plumbrule_core.documents.active_space import GrowthPoint, Space, SpaceRequest
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import NO_PAIRS, correlated_used, has_pairs, reference_name
from plumbrule_core.rungs.correlated.tailored_frame import frame_of
from plumbrule_core.rungs.correlated.tailored_series import Series
from plumbrule_core.rungs.correlated.tailored_values import tailored_value
from plumbrule_core.rungs.costs import iterated_forecast
from plumbrule_core.rungs.protocol import Bench, Given, Kind, Outcome, Published, Size, Tell

SIZES_FORECAST = 3
"""How many sizes a series is expected to have; those after the first start warm, in half the iterations."""


class TCCSD:
    """CCSD tailored by the wave function of the active space, followed as the space grows.

    The energy is taken from the chosen space where the user set it, where the species has partners whose
    spaces are of the same size (energies that are subtracted must stand on the same size), or where no growth
    is asked for; else from the size at which the curve is flattest: of neighbouring sizes whose TCCSD
    energies differ least, the larger (own rule, `correlation.settling`). Sizes without a usable reference or
    convergence do not take part.
    """

    name: str = "TCCSD"
    says = "CCSD with its strongly correlated part solved exactly: for stretched bonds and diradicals."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space")
    rank = 28
    single_reference = False
    citation = "T. Kinoshita, O. Hino and R. J. Bartlett, J. Chem. Phys. 123, 074106 (2005)"
    published: tuple[Published, ...] = (
        tailored_value("T02", -14.4197890821),
        replace(tailored_value("T09", -109.2741922), slow=True),
        tailored_value("T11", -76.238261521),
        tailored_value("T12", -75.9473359),
        tailored_value("T13", -100.2072094005),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Transformation and the iterations of a whole series, whose later sizes start warm."""
        single = 15 if size.unrestricted else 12
        return iterated_forecast(size, machine, iterations=single * (1 + SIZES_FORECAST) // 2)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy and the growth; leaves each size's solution on the bench for (T).

        Raises PlumbruleError where there is no space, or the reference determinant weighs too little in it.
        """
        bench = given.bench
        bench.tailored, bench.tailored_bench = (), None
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        if bench.space is None:
            raise PlumbruleError(
                f"no active space has been chosen for {given.spec.species.name}, and TCCSD is tailored by one"
            )
        frame = frame_of(given)
        series = Series(given=given, frame=frame, tell=tell, chosen=bench.space, finished=[], notes=[])
        bench.tailored = series.follow(sizes(bench, given.spec.space))
        taken = size_taken(bench, given.spec.space)
        assert taken.energy is not None, "the chosen size always has an energy"
        return Outcome(
            energy=taken.energy,
            reference=reference,
            correlation=taken.energy - energy,
            converged=taken.converged,
            iterations=sum(size.iterations for size in bench.tailored),
            notes=tuple(series.notes),
            used={**used, **space_used(bench, given.spec.space)},
            space=taken.space,
            growth=growth(bench.tailored),
        )


def sizes(bench: Bench, request: SpaceRequest | None) -> tuple[Space, ...]:
    """The chosen space and those to follow, smallest first; the chosen alone where no growth is asked for."""
    assert bench.space is not None
    if request is not None and not request.grow:
        return (bench.space,)
    others = [space for space in bench.growth_spaces if space.orbitals != bench.space.orbitals]
    return tuple(sorted([bench.space, *others], key=lambda space: len(space.orbitals)))


def size_taken(bench: Bench, request: SpaceRequest | None) -> Tailored:
    """The size that the energy is taken from, by the rule of `TCCSD`."""
    chosen = next(size for size in bench.tailored if size.space == bench.space)
    usable = [size for size in bench.tailored if size.energy is not None and size.converged]
    if not chosen.converged or (request is not None and (request.choice == "set" or request.partners)):
        return chosen
    return usable[settled([size.energy for size in usable if size.energy is not None])]


def space_used(bench: Bench, request: SpaceRequest | None) -> dict[str, str]:
    """The space, why it is this one, and how far the sizes lie apart."""
    taken = size_taken(bench, request)
    numbers = ", ".join(map(str, taken.space.orbitals)) or "none"
    used = {
        "active space": f"{taken.space.label}, orbitals {numbers}",
        "weight of the reference": f"{taken.c0_squared:.4f}",
    }
    energies = [size.energy for size in bench.tailored if size.energy is not None and size.converged]
    if len(energies) > 1:
        used["size of the space taken"] = _rule_taken(request)
        used["spread over the sizes"] = f"{spread(energies):.6f} hartree"
    return used


def _rule_taken(request: SpaceRequest | None) -> str:
    if request is not None and request.choice == "set":
        return "the size that was set"
    return "the size that all species have" if request is not None and request.partners else RULE


def growth(
    tailored: Sequence[Tailored], triples: Mapping[tuple[int, ...], float] | None = None
) -> tuple[GrowthPoint, ...]:
    """Energies at each size; `triples` in hartree by the orbitals of the size."""
    return tuple(_point(size, (triples or {}).get(size.space.orbitals)) for size in tailored)


def _point(size: Tailored, triples: float | None) -> GrowthPoint:
    energies = {"CASCI": size.active_energy}
    if size.energy is not None and size.converged:
        energies["TCCSD"] = size.energy
        if triples is not None:
            energies["TCCSD(T)"] = size.energy + triples
    return GrowthPoint(
        electrons=size.space.electrons,
        orbitals=size.space.orbitals,
        energies=energies,
        c0_squared=min(size.c0_squared, 1.0),
    )
