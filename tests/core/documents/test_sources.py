import pytest

from plumbrule_core.documents.sources import cited


@pytest.mark.parametrize(
    "note",
    [
        "",
        "arithmetic",
        "from memory",
        "common practice, no source",
        "the basis table of this program",
        "own, water dimer in cc-pVDZ",
        "differences of zero-point energies of ordinary molecules: common practice, no source",
    ],
)
def test_what_nobody_can_look_up_is_no_citation(note: str) -> None:
    assert cited(note) == ""


def test_a_paper_is_a_citation_and_so_is_a_public_database() -> None:
    paper = "Lee and Taylor, Int. J. Quantum Chem. Symp. 23, 199 (1989)"
    assert cited(paper) == paper
    assert cited("Lee and Taylor 1989") == "Lee and Taylor 1989"
    assert cited(
        "atoms: NIST Atomic Spectra Database; small molecules: common practice; else the lowest spin"
    ) == ("atoms: NIST Atomic Spectra Database")


def test_of_several_sources_only_those_that_can_be_looked_up_stay() -> None:
    mixed = "Janssen and Nielsen, Chem. Phys. Lett. 290, 423 (1998); from memory; arithmetic"
    assert cited(mixed) == "Janssen and Nielsen, Chem. Phys. Lett. 290, 423 (1998)"
