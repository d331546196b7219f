"""After CCSD(T): how large the triples are, alone and beside the whole correlation energy."""

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.protocol import Bench


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """`triples` and `share_of_triples`; nothing where there is no pair to correlate."""
    if bench.triples is None or bench.coupled_cluster is None:
        return ()
    whole = float(bench.coupled_cluster.e_corr) + bench.triples
    readings = [Reading(name="triples", value=bench.triples, unit="hartree")]
    if whole != 0:
        readings.append(Reading(name="share_of_triples", value=bench.triples / whole))
    return tuple(readings)


TRIPLES = Family(
    after="CCSD(T)",
    names=("triples", "share_of_triples"),
    citation="K. Raghavachari et al., Chem. Phys. Lett. 157, 479 (1989)",
    measure=measure,
)
