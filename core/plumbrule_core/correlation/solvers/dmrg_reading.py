"""What is read off a DMRG state, in the caller's order of orbitals: densities, entropies, coefficients."""

from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.correlation.entropies import entropy
from plumbrule_core.correlation.excitations import Strings, excited, reference_string
from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.solvers.dmrg_sweeps import Found, Sweeps, library
from plumbrule_core.correlation.wave import SHOWN, SHOWN_WEIGHT, assembled


def read_state(sweeps: Sweeps, found: Found, overlap: Array | None) -> dict[str, Array]:
    """Everything of the last state, and the entropies of the narrower one before it for comparison."""
    last = found.stages[-1]
    before = found.stages[-2] if len(found.stages) > 1 else last
    states = [_with_fixed_projection(sweeps, stage.ket, f"READ{k}") for k, stage in enumerate((before, last))]
    _count_spins_apart(sweeps)
    for state in states:
        _normalise(sweeps.driver, state)
    driver, back = sweeps.driver, np.argsort(last.operator.order)
    narrow, state = states
    results = {
        "entropies": _single_entropies(driver, state)[back],
        "narrow_entropies": _single_entropies(driver, narrow)[back],
        "pair_entropies": _pair_entropies(driver, state)[np.ix_(back, back)],
        "densities": np.asarray(driver.get_1pdm(state))[:, back[:, None], back],
        "stages": np.array([(stage.bond, stage.energy, stage.weight) for stage in found.stages]),
        "settled": np.array(last.settled),
        "notes": np.array(found.notes, dtype=str),
        "spin_squared": np.array(_spin_squared(sweeps, state, last.operator.order, overlap)),
    }
    return (
        results
        | _coefficients(sweeps, state, last.operator.order)
        | _leading(sweeps, state, last.operator.order)
    )


def _with_fixed_projection(sweeps: Sweeps, ket: Any, tag: str) -> Any:
    """The state with so many alpha and beta electrons, where the sweeps knew only its total spin."""
    if sweeps.unrestricted:
        return ket
    # The projection is taken at the first site, so the rest must be orthogonal to it.
    sweeps.driver.align_mps_center(ket, ref=0)
    return sweeps.driver.mps_change_to_sz(ket, tag, sz=sweeps.alpha - sweeps.beta)


def _count_spins_apart(sweeps: Sweeps) -> None:
    if sweeps.unrestricted:
        return
    sweeps.driver.symm_type = library().SymmetryTypes.SZ
    sweeps.driver.initialize_system(
        n_sites=sweeps.size, n_elec=sweeps.alpha + sweeps.beta, spin=sweeps.alpha - sweeps.beta
    )


def _normalise(driver: Any, state: Any) -> None:
    """Of a doublet or higher, one projection alone has been kept, and with it a part of the norm."""
    squared = float(driver.expectation(state, driver.get_identity_mpo(), state))
    state.load_tensor(state.center)
    state.tensors[state.center].iscale(squared**-0.5)
    state.save_tensor(state.center)
    state.unload_tensor(state.center)


def _single_entropies(driver: Any, state: Any) -> Array:
    """Entropies (n,) in the order of the sites."""
    weights = _elements(driver, state, *library().OrbitalEntropy.get_one_orb_rdm_exprs())
    return np.array([entropy(row) for row in weights])


def _pair_entropies(driver: Any, state: Any) -> Array:
    """Entropies of two orbitals (n, n) in the order of the sites.

    The engine's own method takes logarithms of weights that rounding made negative.
    """
    elements = _elements(driver, state, *library().OrbitalEntropy.get_two_orb_rdm_exprs())
    found = np.zeros(elements.shape[:2])
    for p, q in combinations(range(len(found)), 2):
        spectrum = library().OrbitalEntropy.get_two_orb_rdm_eigvals(elements[p, q])
        found[p, q] = found[q, p] = entropy(np.asarray(spectrum))
    return found


def _elements(driver: Any, state: Any, expressions: Any, count: int) -> Array:
    """Elements of orbital density matrices, last axis; each is a sum of strings of creations and so on."""
    keys = list(expressions)
    strings = driver.get_npdm(
        state.deep_copy(f"{state.info.tag}-{count}"),
        pdm_type=[len(string) // 2 for string, _ in keys],
        npdm_expr=[string for string, _ in keys],
        mask=[list(sites) for _, sites in keys],
        iprint=0,
    )
    pair = count > 4
    elements = np.zeros((driver.n_sites,) * (2 if pair else 1) + (count,))
    for (key, uses), values in zip(expressions.items(), strings, strict=True):
        shaped = np.asarray(values, dtype=float)
        if pair and set(key[1]) == {0}:
            shaped = shaped[:, None]
        for place, factor in uses:
            elements[..., place] += factor * shaped
    return elements


def _spin_squared(sweeps: Sweeps, state: Any, order: NDArray[np.int64], overlap: Array | None) -> float:
    """<S2> from the pair density of unlike spins where the two spins have orbitals of their own."""
    if not sweeps.unrestricted:
        return (sweeps.multiplicity**2 - 1) / 4
    if overlap is None:
        return float("nan")
    mixed = overlap[np.ix_(order, order)]
    pairs = np.asarray(sweeps.driver.get_2pdm(state))[1]
    projection = (sweeps.alpha - sweeps.beta) / 2
    flips = sweeps.beta - np.einsum("pq,rs,rqsp->", mixed, mixed, pairs)
    return float(projection * (projection + 1) + flips)


def _coefficients(sweeps: Sweeps, state: Any, order: NDArray[np.int64]) -> dict[str, Array]:
    size = sweeps.size
    up, down = (excited(count, size, 1) for count in (sweeps.alpha, sweeps.beta))
    pairs_up, pairs_down = (excited(count, size, 2) for count in (sweeps.alpha, sweeps.beta))
    first_up, first_down = (np.array([reference_string(n)]) for n in (sweeps.alpha, sweeps.beta))
    lists = [
        (first_up, first_down),
        (up.strings, first_down),
        (first_up, down.strings),
        (pairs_up.strings, first_down),
        (first_up, pairs_down.strings),
        (up.strings, down.strings),
    ]
    grids = [(np.repeat(a, len(b)), np.tile(b, len(a))) for a, b in lists]
    values = amplitudes_at(
        sweeps.driver,
        state,
        order,
        np.concatenate([alpha for alpha, _ in grids]),
        np.concatenate([beta for _, beta in grids]),
    )
    c0, c1a, c1b, c2aa, c2bb, c2ab = np.split(values, np.cumsum([len(alpha) for alpha, _ in grids])[:-1])
    blocks = assembled(
        c0=float(c0[0]),
        singles=(c1a * up.signs, c1b * down.signs),
        pairs=(c2aa * pairs_up.signs, c2bb * pairs_down.signs),
        mixed=c2ab * np.outer(up.signs, down.signs).ravel(),
        electrons=(sweeps.alpha, sweeps.beta),
        size=size,
    )
    names = ("c1a", "c1b", "c2aa", "c2ab", "c2bb")
    return {"c0": np.array(blocks.c0)} | {name: getattr(blocks, name) for name in names}


def amplitudes_at(driver: Any, state: Any, order: NDArray[np.int64], alpha: Strings, beta: Strings) -> Array:
    """Coefficients of determinants, against alpha creations in orbital order and then beta ones."""
    bits_up, bits_down = (strings[:, None] >> order & 1 for strings in (alpha, beta))
    codes = (bits_up + 2 * bits_down).tolist()
    _, values = driver.get_csf_coefficients(state, cutoff=0.0, given_dets=codes, iprint=0)
    return np.asarray(values) * phases(order, alpha, beta)


def phases(order: NDArray[np.int64], alpha: Strings, beta: Strings) -> Array:
    """Signs that take creations site by site, alpha before beta, to all alpha and then all beta ones.

    `order[k]` is the orbital on site k; all determinants must hold equally many electrons of each spin.
    """
    site = np.argsort(order)
    ranks = np.concatenate([2 * _sites(alpha, site), 2 * _sites(beta, site) + 1], axis=1)
    exchanges = np.zeros(len(ranks), dtype=np.int64)
    for k in range(ranks.shape[1]):
        exchanges += (ranks[:, k : k + 1] > ranks[:, k + 1 :]).sum(axis=1)
    return np.where(exchanges % 2, -1.0, 1.0)


def _sites(strings: Strings, site: NDArray[np.int64]) -> NDArray[np.int64]:
    """The sites of each string's electrons (strings, electrons), in the order of the orbitals."""
    filled = np.nonzero(strings[:, None] >> np.arange(len(site)) & 1)[1]
    return site[filled].reshape(len(strings), -1)


def _leading(sweeps: Sweeps, state: Any, order: NDArray[np.int64]) -> dict[str, Array]:
    """Weights, and codes (determinants, orbitals): 1 alpha, 2 beta, 3 both; heaviest first."""
    codes, values = sweeps.driver.get_csf_coefficients(state, cutoff=SHOWN_WEIGHT**0.5, iprint=0)
    weights = np.square(np.asarray(values, dtype=float))
    heaviest = np.argsort(-weights, kind="stable")[:SHOWN]
    codes = np.asarray(codes, dtype=np.int64).reshape(-1, sweeps.size)
    return {
        "leading_weights": weights[heaviest],
        "leading_codes": codes[heaviest][:, np.argsort(order)],
    }
