"""Starting guesses: one for ordinary closed shells, several where starts are known to end differently."""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.scf.ladder import BROKEN, Measure, guessed_density, holds_huckel, run
from plumbrule_core.rungs.scf.watch import Watch
from plumbrule_core.units import KJ_PER_HARTREE

GUESSES = {
    "minao": "minimal basis",
    "atom": "atomic densities",
    "huckel": "extended Huckel",
}
LOOSE = 1e-5
"""Energy tolerance in hartree to which the guesses are compared."""
SAME = 1e-4
"""Guesses that end within this many hartree are taken to have reached one solution."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Start:
    """Where the field starts from: the guess that won, its density, and what the search found."""

    guess: str
    density: Any
    notes: tuple[str, ...] = ()


def needs_search(symbols: Iterable[str], unpaired: int) -> bool:
    """Open shells and transition metals are started from several guesses."""
    return unpaired > 0 or any(ELEMENTS[symbol].is_transition_metal for symbol in symbols)


def search(mean_field: Any, watch: Watch) -> Start:
    """Run every guess to a loose tolerance; the lowest one wins, and one that breaks is lost.

    Raises PlumbruleError where all of them break.
    """
    tight = mean_field.conv_tol, mean_field.conv_tol_grad
    mean_field.conv_tol, mean_field.conv_tol_grad = LOOSE, None
    found: dict[str, tuple[bool, float, Any]] = {}
    broken: list[str] = []
    for guess in offered(mean_field):
        watch.begin(f"guess: {GUESSES[guess]}")
        try:
            run(mean_field, Measure(name=guess, cycles=40), watch, guessed_density(mean_field, guess))
        except BROKEN as error:
            broken.append(f"{GUESSES[guess]}: {error}")
        else:
            found[guess] = (mean_field.converged, float(mean_field.e_tot), mean_field.make_rdm1())
    mean_field.conv_tol, mean_field.conv_tol_grad = tight
    if not found:
        raise PlumbruleError(f"no starting guess could be made ({'; '.join(broken)}): choose another basis")
    winner = min(found, key=lambda guess: (not found[guess][0], found[guess][1]))
    return Start(guess=winner, density=found[winner][2], notes=(_note(winner, found), *_lost(broken)))


def offered(mean_field: Any) -> tuple[str, ...]:
    """The guesses that this molecule admits."""
    return tuple(guess for guess in GUESSES if guess != "huckel" or holds_huckel(mean_field.mol))


def _lost(broken: list[str]) -> tuple[str, ...]:
    return (f"a starting guess that could not be made was left out ({'; '.join(broken)})",) if broken else ()


def _note(winner: str, found: dict[str, tuple[bool, float, Any]]) -> str:
    energies = {guess: energy for guess, (converged, energy, _) in found.items() if converged}
    lost = [GUESSES[guess] for guess in found if guess not in energies]
    many = "one starting guess" if len(found) == 1 else f"{len(found)} starting guesses"
    text = f"{many}; the lowest came from {GUESSES[winner]}"
    if energies:
        spread = max(energies.values()) - min(energies.values())
        text += (
            ", and all that converged agree"
            if spread < SAME
            else f", and they spread over {spread * KJ_PER_HARTREE:.1f} kJ/mol ({spread:.4f} hartree)"
        )
    return text + (f"; not converged: {', '.join(lost)}" if lost else "")
