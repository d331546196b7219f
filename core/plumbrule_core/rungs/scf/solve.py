"""One solution of the self-consistent field, from the checkpoint or from the beginning."""

from typing import Any

from plumbrule_core.rungs.protocol import Given, Stability, Tell
from plumbrule_core.rungs.scf.guesses import GUESSES, Start, needs_search, search
from plumbrule_core.rungs.scf.ladder import converge, set_tolerances
from plumbrule_core.rungs.scf.stability import follow, settle
from plumbrule_core.rungs.scf.stored import Solved, finished, fits, keep
from plumbrule_core.rungs.scf.watch import Watch


def solve(mean_field: Any, given: Given, tell: Tell, functional: bool = False) -> Solved:
    """Converge the field to a minimum of its kind, and measure its stability.

    For a functional the solution is followed to a minimum too, but not compared with an unrestricted one.
    Raises PlumbruleError where no measure converges it, Stopped where the user asked.
    """
    set_tolerances(mean_field, given.spec.settings.scf_tolerance, functional)
    stored = given.shelf.load() or {}
    if (kept := finished(stored, mean_field)) is not None:
        solved, gradient = kept
        tell.iteration(1, float(mean_field.e_tot), gradient, "stored orbitals")
        return solved
    watch = Watch(shelf=given.shelf, tell=tell)
    start = _resumed(stored, mean_field, watch) or _start(mean_field, given, watch)
    measure = converge(mean_field, start.guess, watch, given.spec.species.name, start.density)
    stability, followed = _followed(mean_field, watch) if functional else settle(mean_field, watch)
    for note in (*start.notes, *followed):
        tell.note(note)
    solved = Solved(
        iterations=watch.iterations,
        guess=start.guess,
        measure=measure,
        stability=stability,
        notes=(*start.notes, *followed),
    )
    keep(given.shelf, mean_field, solved)
    tell.checkpoint("converged orbitals")
    return solved


def _followed(mean_field: Any, watch: Watch) -> tuple[Stability, tuple[str, ...]]:
    stable, notes = follow(mean_field, watch)
    return Stability(internal=stable), notes


def _start(mean_field: Any, given: Given, watch: Watch) -> Start:
    species = given.spec.species
    if needs_search(species.counts, species.unpaired):
        return search(mean_field, watch)
    return Start(guess="minao", density=None)


def _resumed(stored: Any, mean_field: Any, watch: Watch) -> Start | None:
    """Carry on from the last orbitals; a search among guesses starts again, to end the same way."""
    if not fits(stored, mean_field) or str(stored.get("stage", "guess")).startswith("guess"):
        return None
    watch.iterations = int(stored["iterations"])
    density = mean_field.make_rdm1(stored["orbitals"], stored["occupations"])
    return Start(guess="minao", density=density, notes=(f"carried on from iteration {watch.iterations}",))


def guess_words(solved: Solved) -> str:
    """The guess as the report names it."""
    return GUESSES[solved.guess]
