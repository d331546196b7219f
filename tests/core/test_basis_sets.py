"""The shipped tables of basis sets and frozen cores, held against PySCF's own molecules."""

import dataclasses
import warnings

import pytest

from plumbrule_core.basis_sets import BASES, FROZEN_CORE, Basis, find, frozen_orbitals, nearest
from plumbrule_core.errors import PlumbruleError


def built(basis: Basis, symbols: list[str]):
    """A PySCF molecule built as the module's docstring says, atoms far apart."""
    from pyscf import gto

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # PySCF recommends another package when it looks for potentials
        return gto.M(
            atom=[[symbol, (0, 0, 5.0 * place)] for place, symbol in enumerate(symbols)],
            basis={symbol: basis.name_for(symbol) for symbol in symbols},
            ecp={symbol: name for symbol in symbols if (name := basis.potential_for(symbol))},
            cart=basis.cartesian,
            spin=None,
            verbose=0,
        )


SAMPLE = [
    ("STO-3G", ["H", "C", "Fe"]),
    ("3-21G", ["H", "C", "Zn"]),
    ("6-31G*", ["H", "C", "S", "Fe"]),
    ("6-31++G**", ["H", "O", "Cl"]),
    ("6-311G**", ["H", "N", "Br"]),
    ("cc-pVDZ", ["H", "He", "N", "Ar", "Ni", "Kr"]),
    ("cc-pVQZ", ["H", "Li", "S"]),
    ("aug-cc-pVTZ", ["H", "F", "Cl"]),
    ("cc-pCVTZ", ["H", "He", "N", "Si"]),
    ("aug-cc-pwCVTZ", ["H", "O", "Ti"]),
    ("cc-pVTZ-PP", ["H", "O", "Cu", "Br", "I", "Au"]),
    ("aug-cc-pVDZ-PP", ["H", "Ag"]),
    ("cc-pwCVTZ-PP", ["H", "C", "Cd"]),
    ("cc-pVDZ-DK", ["H", "C"]),
    ("def2-SVP", ["H", "Kr", "Rb", "I", "Cs", "Au", "Rn"]),
    ("def2-TZVPD", ["H", "O", "I"]),
    ("def2-QZVPP", ["H", "C", "Pt"]),
]


@pytest.mark.parametrize(("name", "symbols"), SAMPLE, ids=[name for name, _ in SAMPLE])
def test_functions_replaced_electrons_and_frozen_core_are_those_of_the_built_molecule(name, symbols):
    from pyscf.data.elements import chemcore

    basis = BASES[name]
    molecule = built(basis, symbols)
    replaced = [int(molecule.atom_nelec_core(place)) for place in range(molecule.natm)]
    assert molecule.nao == basis.functions(symbols)
    assert replaced == [basis.potential_electrons(symbol) for symbol in symbols]
    assert frozen_orbitals(symbols, basis) == chemcore(molecule)


@pytest.mark.parametrize("name", BASES)
def test_every_set_builds_with_its_first_and_last_element(name):
    basis = BASES[name]
    for symbol in (next(iter(basis.counts)), list(basis.counts)[-1]):
        assert built(basis, [symbol]).nao == basis.functions([symbol])


@pytest.mark.parametrize(
    ("name", "symbol", "count"),
    [
        # Dunning, J. Chem. Phys. 90, 1007 (1989), contractions [3s2p1d], [4s3p2d1f], [5s4p3d2f1g]
        ("cc-pVDZ", "N", 3 + 2 * 3 + 5),
        ("cc-pVTZ", "N", 4 + 3 * 3 + 2 * 5 + 7),
        ("cc-pVQZ", "N", 5 + 4 * 3 + 3 * 5 + 2 * 7 + 9),
        ("cc-pVTZ", "H", 3 + 2 * 3 + 5),
        # Kendall, Dunning and Harrison, J. Chem. Phys. 96, 6796 (1992): one more of each
        ("aug-cc-pVDZ", "O", 4 + 3 * 3 + 2 * 5),
        # Woon and Dunning, J. Chem. Phys. 103, 4572 (1995): 2s2p1d more than cc-pVTZ
        ("cc-pCVTZ", "C", 30 + 2 + 2 * 3 + 5),
        # Hariharan and Pople, Theor. Chim. Acta 28, 213 (1973): [3s2p] and six d functions
        ("6-31G*", "C", 3 + 2 * 3 + 6),
        # Weigend and Ahlrichs, Phys. Chem. Chem. Phys. 7, 3297 (2005): [3s2p1d]
        ("def2-SVP", "C", 3 + 2 * 3 + 5),
    ],
)
def test_sizes_are_the_published_contractions(name, symbol, count):
    assert BASES[name].functions([symbol]) == count


def test_the_frozen_core_table_is_pyscfs_up_to_radon():
    from pyscf.data.elements import ELEMENTS, chemcore_atm

    assert {s: n for s, n in zip(ELEMENTS[1:87], chemcore_atm[1:87], strict=True)} == dict(FROZEN_CORE)


def test_a_potential_larger_than_the_core_leaves_nothing_to_freeze():
    assert FROZEN_CORE["Cs"] == 18
    assert BASES["def2-SVP"].potential_electrons("Cs") == 46
    assert frozen_orbitals(["Cs", "C"], BASES["def2-SVP"]) == 1


def test_neighbours_and_partners_are_known_sets_and_point_the_right_way():
    for basis in BASES.values():
        for link in (basis.larger, basis.smaller, basis.diffuse_partner, basis.core_partner):
            assert link is None or link in BASES, (basis.name, link)
        if basis.larger:
            shared = [s for s in BASES[basis.larger].counts if s in basis.counts and s not in ("Xe", "Rn")]
            bigger = BASES[basis.larger]
            assert all(bigger.counts[s] >= basis.counts[s] for s in shared), basis.name
            assert bigger.zeta >= basis.zeta
        if basis.diffuse_partner:
            assert BASES[basis.diffuse_partner].diffuse
            assert not basis.diffuse
        if basis.core_partner:
            assert BASES[basis.core_partner].core_valence


@pytest.mark.parametrize("family", ["cc-pVXZ", "aug-cc-pVXZ", "cc-pCVXZ", "cc-pVXZ-PP"])
def test_a_correlation_consistent_family_is_one_chain_of_cardinals_two_to_five(family):
    basis = next(b for b in BASES.values() if b.family == family and b.cardinal == 2)
    seen = [basis.cardinal]
    while basis.larger:
        assert BASES[basis.larger].smaller == basis.name
        basis = BASES[basis.larger]
        seen.append(basis.cardinal)
    assert seen == [2, 3, 4, 5]


@pytest.mark.parametrize(
    ("asked", "found"),
    [
        ("cc-pvtz", "cc-pVTZ"),
        ("CC PVTZ", "cc-pVTZ"),
        ("aug-cc-pVDZ", "aug-cc-pVDZ"),
        ("6-31g(d)", "6-31G*"),
        ("6-31G(d, p)", "6-31G**"),
        ("6311++G**", "6-311++G**"),
        ("def2 tzvp", "def2-TZVP"),
        ("cc‑pVDZ", "cc-pVDZ"),
    ],
)
def test_a_name_is_found_whatever_its_capitals_hyphens_and_spaces(asked, found):
    basis = find(asked)
    assert basis is not None
    assert basis.name == found


@pytest.mark.parametrize("asked", ["", "cc-pVXZ", "aug", "6-31", "☃"])
def test_an_unknown_name_finds_nothing(asked):
    assert find(asked) is None


def test_light_atoms_take_the_valence_set_where_there_is_no_core_set_for_them():
    basis = BASES["cc-pCVTZ"]
    assert basis.missing(["H", "He", "N"]) == ()
    assert basis.name_for("H") == "cc-pVTZ"
    assert basis.name_for("N") == "cc-pCVTZ"
    assert basis.functions(["H"]) == BASES["cc-pVTZ"].functions(["H"])
    assert basis.missing(["Fe"]) == ("Fe",)


def test_missing_elements_are_named_once_and_counting_them_is_refused():
    basis = BASES["cc-pVTZ"]
    assert basis.missing(["I", "H", "I", "Xe"]) == ("I", "Xe")
    with pytest.raises(PlumbruleError, match="cc-pVTZ has no functions for I, Xe"):
        basis.functions(["I", "H", "Xe"])


def test_elements_whose_diffuse_functions_the_library_lacks_are_not_claimed():
    assert BASES["6-31++G**"].missing(["Fe", "O"]) == ("Fe",)
    assert BASES["6-311++G**"].missing(["Br"]) == ("Br",)
    assert BASES["def2-QZVPD"].missing(["Mn", "C"]) == ("Mn",)


@pytest.mark.parametrize(
    ("asked", "symbols", "first"),
    [
        ("cc-pVTZ", ["I", "H"], "cc-pVTZ-PP"),
        ("cc-pVTZ", ["K", "O"], "def2-TZVP"),
        ("6-31G*", ["Xe", "F"], "def2-SVP"),
        ("aug-cc-pVDZ", ["Li", "I"], "def2-SVPD"),
        ("cc-pCVTZ", ["Fe", "H"], "cc-pwCVTZ"),
        ("cc-pvtx", ["C"], "cc-pVTZ"),
    ],
)
def test_the_nearest_complete_set_is_proposed(asked, symbols, first):
    proposals = nearest(asked, symbols)
    assert proposals[0].name == first
    assert len(proposals) == 3
    assert all(not basis.missing(symbols) for basis in proposals)


@pytest.mark.filterwarnings("ignore:Basis may be available:UserWarning")
def test_fitting_sets_are_claimed_only_where_both_exist_for_the_element():
    from pyscf.gto import basis as library
    from pyscf.lib.exceptions import BasisNotFoundError

    cc = BASES["cc-pVDZ"]
    assert cc.fits(["H", "C", "O"])
    assert not cc.fits(["H", "Li"])
    assert not BASES["cc-pCVTZ"].fits(["C"])
    assert cc.fitting is not None
    assert all(library.load(name, "C") for name in cc.fitting)
    with pytest.raises(BasisNotFoundError):
        library.load(cc.fitting[0], "Li")


def test_a_basis_cannot_be_changed():
    with pytest.raises(dataclasses.FrozenInstanceError):
        BASES["cc-pVDZ"].zeta = 3
    with pytest.raises(TypeError):
        BASES["cc-pVDZ"].counts["C"] = 3
    with pytest.raises(TypeError):
        BASES["mine"] = BASES["cc-pVDZ"]
