"""The library's correlated objects on our reference, and the integrals that they share."""

from typing import Any

from plumbrule_core.rungs.correlated.reference import correlated_reference, fitting_of, is_unrestricted
from plumbrule_core.rungs.protocol import Given


def perturbation(given: Given) -> Any:
    """An MP2 object that has not run."""
    from pyscf.mp import dfmp2, dfump2, mp2, ump2

    plain, fitted = (ump2.UMP2, dfump2.DFUMP2) if _unrestricted(given) else (mp2.RMP2, dfmp2.DFMP2)
    return _made(given, plain, fitted)


def configuration_interaction(given: Given) -> Any:
    """A CISD object that has not run; its integrals come from `integrals`."""
    from pyscf.ci import cisd, ucisd

    kind = ucisd.UCISD if _unrestricted(given) else cisd.RCISD
    return _made(given, kind, kind)


def coupled_cluster(given: Given) -> Any:
    """A CCSD object that has not run."""
    from pyscf.cc import ccsd, dfccsd, dfuccsd, uccsd

    plain, fitted = (uccsd.UCCSD, dfuccsd.UCCSD) if _unrestricted(given) else (ccsd.CCSD, dfccsd.RCCSD)
    return _made(given, plain, fitted)


def integrals(given: Given) -> Any:
    """The transformed integrals, made once for CISD, CCSD and (T)."""
    if given.bench.integrals is None:
        given.bench.integrals = coupled_cluster(given).ao2mo()
    return given.bench.integrals


def _unrestricted(given: Given) -> bool:
    return is_unrestricted(correlated_reference(given.bench))


def _made(given: Given, plain: Any, fitted: Any) -> Any:
    from pyscf import lib

    lib.num_threads(given.threads)
    fitting = given.spec.settings.density_fitting
    solver = (fitted if fitting else plain)(
        correlated_reference(given.bench), frozen=given.bench.frozen or None
    )
    solver.verbose, solver.max_memory = 0, given.memory_mb
    if fitting:
        solver.with_df = fitting_of(given)
    return solver
