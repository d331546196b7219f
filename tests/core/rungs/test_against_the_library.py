"""Our energies are those of a bare PySCF script at the same settings."""

import pytest

HYDROXYL = "O 0 0 0; H 0 0 0.97"
FLUORIDE = "H 0 0 0; F 0 0 0.917"


def bare(xyz, basis, spin, frozen, fitting=None):
    """HF, CISD, CCSD and CCSD(T) in a few library lines; `fitting` names the two fitting sets."""
    from pyscf import cc, ci, df, gto, scf

    molecule = gto.M(atom=xyz, basis=basis, spin=spin, verbose=0)
    field = (scf.UHF if spin else scf.RHF)(molecule)
    if fitting:
        field = field.density_fit(auxbasis=fitting[0])
    field.conv_tol = 1e-11
    field.kernel()
    coupled = cc.CCSD(field, frozen=frozen)
    coupled.conv_tol, coupled.conv_tol_normt = 1e-9, 1e-7
    if fitting:
        coupled.with_df = df.DF(molecule, auxbasis=fitting[1])
    integrals = coupled.ao2mo()
    coupled.kernel(eris=integrals)
    mixed = ci.CISD(field, frozen=frozen)
    mixed.kernel(eris=integrals)
    triples = coupled.ccsd_t(eris=integrals)
    return {
        "HF": field.e_tot,
        "CISD": mixed.e_tot,
        "CCSD": coupled.e_tot,
        "CCSD(T)": coupled.e_tot + triples,
    }


@pytest.mark.parametrize("core", ["frozen", "all"])
@pytest.mark.parametrize(("xyz", "multiplicity"), [(FLUORIDE, 1), (HYDROXYL, 2)])
@pytest.mark.parametrize("fitting", [False, True])
def test_the_ladder_is_that_of_the_bare_library(xyz, multiplicity, core, fitting, climb):
    from plumbrule_core.basis_sets import BASES

    climbed = climb(xyz, "CISD", "CCSD(T)", multiplicity=multiplicity, core=core, density_fitting=fitting)
    sets = BASES["cc-pVDZ"].fitting if fitting else None
    expected = bare(xyz, "cc-pvdz", multiplicity - 1, 1 if core == "frozen" else 0, sets)
    for rung, energy in expected.items():
        assert climbed.energy(rung) == pytest.approx(energy, abs=1e-6), rung


def test_density_fitting_shifts_a_total_energy_by_some_hundred_microhartree_at_most(climb):
    plain = climb(FLUORIDE, "CCSD(T)").energy("CCSD(T)")
    fitted = climb(FLUORIDE, "CCSD(T)", density_fitting=True)
    assert 1e-7 < abs(fitted.energy("CCSD(T)") - plain) < 3e-4
    assert fitted.outcomes["CCSD"].used["density fitting of the correlation"] == "cc-pvdz-ri"


def test_ccsd_on_rohf_keeps_the_determinant_whatever_the_orbitals(climb):
    from pyscf import cc, gto, scf

    field = scf.ROHF(gto.M(atom=HYDROXYL, basis="cc-pvdz", spin=1, verbose=0)).run(conv_tol=1e-11)
    library = cc.UCCSD(field.to_uhf(), frozen=1).run(conv_tol=1e-9, conv_tol_normt=1e-7)
    climbed = climb(HYDROXYL, "CCSD", multiplicity=2, reference="ROHF")
    assert climbed.energy("CCSD") == pytest.approx(library.e_tot, abs=1e-6)


def test_mp2_on_rohf_is_second_order_in_semicanonical_orbitals_with_singles(climb):
    # Independent route: the sums written out over semicanonical orbitals and the library's plain integrals.
    import numpy as np
    from pyscf import ao2mo, gto, scf

    molecule = gto.M(atom=HYDROXYL, basis="6-31g", spin=1, verbose=0)
    field = scf.ROHF(molecule).run(conv_tol=1e-12)
    spins = field.to_uhf()
    energy = 0.0
    focks = spins.get_fock()
    orbitals, values = [], []
    for spin, fock in enumerate(focks):
        c, filled = spins.mo_coeff[spin], molecule.nelec[spin]
        blocks = [c[:, :filled], c[:, filled:]]
        turned = [np.linalg.eigh(block.T @ fock @ block) for block in blocks]
        orbitals.append([block @ turn for block, (_, turn) in zip(blocks, turned, strict=True)])
        values.append([e for e, _ in turned])
        coupling = orbitals[spin][0].T @ fock @ orbitals[spin][1]
        energy += np.sum(coupling**2 / (values[spin][0][:, None] - values[spin][1]))
    for s, t in ((0, 0), (0, 1), (1, 1)):
        (oa, va), (ob, vb) = orbitals[s], orbitals[t]
        shape = (oa.shape[1], va.shape[1], ob.shape[1], vb.shape[1])
        ovov = ao2mo.kernel(molecule, (oa, va, ob, vb), compact=False).reshape(shape)
        gap = (
            values[s][0][:, None, None, None]
            - values[s][1][:, None, None]
            + values[t][0][:, None]
            - values[t][1]
        )
        pair = ovov if s != t else ovov - ovov.transpose(0, 3, 2, 1)
        energy += np.sum(pair**2 / gap) * (1 if s != t else 0.25)
    climbed = climb(HYDROXYL, "MP2", basis="6-31G", core="all", multiplicity=2, reference="ROHF")
    assert climbed.outcomes["MP2"].correlation == pytest.approx(energy, abs=1e-7)


def test_scalar_relativity_lowers_hydrogen_fluoride_by_what_the_library_says(climb):
    from pyscf import gto, scf

    field = scf.RHF(gto.M(atom=FLUORIDE, basis="cc-pvdz", verbose=0)).x2c().run(conv_tol=1e-11)
    climbed = climb(FLUORIDE, "HF", relativity="X2C")
    assert climbed.energy("HF") == pytest.approx(field.e_tot, abs=1e-8)


def test_a_core_potential_comes_with_the_basis_it_belongs_to(climb):
    from pyscf import gto, scf

    xyz = "H 0 0 0; I 0 0 1.609"
    field = scf.RHF(gto.M(atom=xyz, basis="def2-svp", ecp="def2-svp", verbose=0)).run(conv_tol=1e-11)
    climbed = climb(xyz, "HF", basis="def2-SVP")
    assert climbed.energy("HF") == pytest.approx(field.e_tot, abs=1e-7)
    assert climbed.outcomes["HF"].used["core potential of"] == "I"


def test_little_memory_changes_the_route_and_not_the_number(climb):
    roomy = climb(FLUORIDE, "CCSD(T)").energy("CCSD(T)")
    tight = climb(FLUORIDE, "CCSD(T)", memory_mb=1).energy("CCSD(T)")
    assert tight == pytest.approx(roomy, abs=1e-7)
