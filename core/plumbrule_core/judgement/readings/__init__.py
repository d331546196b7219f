"""Readings: what is measured after each rung. A reading never judges; the rules do.

| reading | after | unit | what it is |
|---|---|---|---|
| `s2` | HF | | <S^2> of the reference |
| `s2_ideal` | HF | | S(S+1) of the multiplicity |
| `s2_excess` | HF | | `s2` - `s2_ideal` |
| `stable` | HF | | the solution is a minimum of its kind (after following) |
| `stable_external` | HF | | closed-shell RHF alone: no unrestricted solution starts here |
| `instability_depth` | HF | hartree | how far UHF lies below RHF; 0 where it does not |
| `uhf_natural_occupations` | HF | electrons | natural occupations of UHF, largest first |
| `uhf_fractional` | HF | electrons | their largest min(n, 2 - n), single ones left out: 1 is a diradical |
| `homo_lumo_gap` | HF | eV | lowest virtual minus highest occupied, the smaller of two spins |
| `overlap_condition` | HF | | smallest eigenvalue of the overlap matrix of the basis |
| `removed_functions` | HF | functions | combinations of basis functions removed as linearly dependent |
| `natural_occupations` | MP2 | electrons | unrelaxed natural occupations, core left out, largest first |
| `M` | MP2 | | (2 - n_DONO + sum |n_SOMO - 1| + n_UNO) / 2 from the MP2 occupations |
| `mp2_largest_t2` | MP2 | | largest absolute first-order doubles amplitude |
| `c0_squared` | CISD | | weight of the reference determinant |
| `s1_max`, `s1_sum` | Active space | | largest entropy of an orbital of the window; their sum |
| `zs1` | Active space | | mean entropy of the valence orbitals over ln 4 |
| `c0_squared` | Active space | | weight of the reference determinant in the window |
| `strongest_pairs` | Active space | | two orbital numbers and their mutual information, five times |
| `profile_settled` | Active space | | the window's solution is right as far as two settings can tell |
| `profile_change` | Active space | | largest change of an entropy between the two settings |
| `T1` | CCSD | | norm of the singles amplitudes per correlated electron |
| `D1` | CCSD | | largest singular value of the singles amplitudes |
| `D2` | CCSD | | closed shells alone: the same for the doubles |
| `largest_t1`, `largest_t2` | CCSD | | largest absolute amplitudes |
| `share_of_triples` | CCSD(T) | | (T) divided by the whole correlation energy |
| `triples` | CCSD(T) | hartree | the (T) correction |

A reading that is not defined for a case (no pairs to correlate, an open shell) is absent, never zero.
The share of the atomisation energy is taken elsewhere.
"""

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.amplitudes import AMPLITUDES
from plumbrule_core.judgement.readings.configuration import CONFIGURATION
from plumbrule_core.judgement.readings.entropy import ENTROPY
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.judgement.readings.occupations import OCCUPATIONS
from plumbrule_core.judgement.readings.reference import REFERENCE
from plumbrule_core.judgement.readings.triples import TRIPLES
from plumbrule_core.rungs.protocol import Bench

READINGS: tuple[Family, ...] = (REFERENCE, OCCUPATIONS, CONFIGURATION, ENTROPY, AMPLITUDES, TRIPLES)
"""Every family of readings."""


def take(rung: str, bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """What can be read once this rung has been computed on this bench; called after each rung."""
    return tuple(
        reading for family in READINGS if family.after == rung for reading in family.measure(bench, spec)
    )
