"""CASCI, CASSCF, NEVPT2, DMRG and FCI against the bare library, check values and identities."""

from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from plumbrule_core.correlation.solvers import SOLVERS
from plumbrule_core.correlation.window import orbital_set
from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.errors import PlumbruleError, Stopped
from plumbrule_core.rungs.active import optimise
from plumbrule_core.rungs.casci import CASCI
from plumbrule_core.rungs.casscf import CASSCF
from plumbrule_core.rungs.dmrg_rung import DMRG
from plumbrule_core.rungs.fci import FCI
from plumbrule_core.rungs.hartree_fock import HartreeFock
from plumbrule_core.rungs.mp2 import MP2
from plumbrule_core.rungs.nevpt2 import NEVPT2
from plumbrule_core.rungs.protocol import Bench, Given, Outcome

NITROGEN = "N 0 0 0; N 0 0 1.1"
OXYGEN = "O 0 0 0; O 0 0 1.2"
SIX = (5, 6, 7, 8, 9, 10)
RUNG = {r.name: r for r in (HartreeFock(), MP2(), CASCI(), CASSCF(), NEVPT2(), DMRG(), FCI())}


class Kept:
    """A shelf in memory."""

    kept: dict[str, np.ndarray] | None = None

    def load(self) -> dict[str, np.ndarray] | None:
        return None if self.kept is None else {name: array.copy() for name, array in self.kept.items()}

    def save(self, arrays: Any) -> None:
        self.kept = {name: np.array(array) for name, array in arrays.items()}


@dataclass
class Ladder:
    """One species with a space set by hand, climbed rung by rung."""

    make_task: Any
    ear: Any
    xyz: str
    settings: dict[str, Any]
    request: SpaceRequest
    memory_mb: float = 2000
    bench: Bench = field(default_factory=Bench)
    shelves: dict[str, Kept] = field(default_factory=dict)
    ears: dict[str, Any] = field(default_factory=dict)

    def compute(self, rung: str, **stops: Any) -> Outcome:
        spec = self.make_task(self.xyz, rung, **self.settings).model_copy(update={"space": self.request})
        shelf, ear = self.shelves.setdefault(rung, Kept()), self.ears.setdefault(rung, self.ear(**stops))
        given = Given(spec=spec, bench=self.bench, shelf=shelf, threads=1, memory_mb=self.memory_mb)
        outcome = RUNG[rung].compute(given, ear)
        self.bench.outcomes[rung] = outcome
        return outcome

    def again(self) -> "Ladder":
        """The same species in a new worker: only the shelves are left."""
        fresh = Ladder(self.make_task, self.ear, self.xyz, self.settings, self.request, shelves=self.shelves)
        fresh.compute("HF")
        fresh.bench.orbitals, fresh.bench.space = self.bench.orbitals, self.bench.space
        return fresh


@pytest.fixture
def ladder(make_task, ear):
    """`ladder(xyz, electrons, orbitals, choice=..., set_=..., **settings)`, with HF done and a space."""

    def build(xyz, electrons, orbitals, choice="propose", set_="canonical", **settings):
        numbers = tuple(orbitals) if choice == "set" else None
        made = Ladder(make_task, ear, xyz, settings, SpaceRequest(choice=choice, orbitals=numbers))
        made.compute("HF")
        made.bench.orbitals = orbital_set(made.bench.mean_field, made.bench.frozen, set_).coefficients
        made.bench.space = Space(electrons=electrons, orbitals=tuple(orbitals))
        return made

    return build


def bare(xyz, basis, orbitals, electrons, spin=0):
    """CASCI in canonical orbitals, CASSCF from them and NEVPT2 on it, in a few library lines.

    With point-group symmetry, which keeps degenerate orbitals along the axes.
    """
    from pyscf import gto, mcscf, mrpt, scf

    molecule = gto.M(atom=xyz, basis=basis, spin=spin, symmetry=True, verbose=0)
    field = (scf.ROHF if spin else scf.RHF)(molecule).run(conv_tol=1e-12)
    active = (orbitals, electrons)
    single = mcscf.CASCI(field, *active)
    single.fix_spin_(ss=spin / 2 * (spin / 2 + 1))
    optimised = mcscf.CASSCF(field, *active)
    optimised.fix_spin_(ss=spin / 2 * (spin / 2 + 1))
    optimised.conv_tol, optimised.conv_tol_grad = 1e-11, 1e-6
    first, second = single.kernel()[0], optimised.kernel()[0]
    return first, second, second + mrpt.NEVPT(optimised).kernel()


def test_nitrogen_is_that_of_the_bare_library_and_of_the_check_value(ladder):
    # Check value A04 (own, PySCF 2.14): CASSCF -109.090227072, NEVPT2 correction -0.156225827, the latter
    # from orbitals turned by rounding, which moves it by 2e-6. Aligned ones are compared to 1e-6.
    expected = bare(NITROGEN, "cc-pvdz", 6, 6)
    at = ladder(NITROGEN, 6, SIX, core="all")
    found = [at.compute(rung) for rung in ("CASCI", "CASSCF", "NEVPT2")]
    assert [one.energy for one in found] == pytest.approx(expected, abs=1e-6)
    assert found[1].energy == pytest.approx(-109.090227072, abs=1e-7)
    assert found[2].energy == pytest.approx(-109.090227072 - 0.156225827, abs=5e-6)


def test_triplet_oxygen_is_that_of_the_bare_library(ladder):
    expected = bare(OXYGEN, "6-31g", 6, 8, spin=2)
    at = ladder(OXYGEN, 8, SIX, core="all", basis="6-31G", multiplicity=3, reference="ROHF")
    found = [at.compute(rung) for rung in ("CASSCF", "NEVPT2")]
    assert [one.energy for one in found] == pytest.approx(expected[1:], abs=1e-6)
    assert at.compute("CASCI").used["S squared"] == "2.0000"


@pytest.mark.slow
def test_triplet_oxygen_in_a_larger_basis_is_the_check_value(ladder):
    # Check value G02 (own, PySCF 2.14): CASSCF(8e,6o)/cc-pVTZ at 1.2075 angstrom, -149.7519370276.
    at = ladder("O 0 0 0; O 0 0 1.2075", 8, SIX, set_="valence", basis="cc-pVTZ", multiplicity=3)
    assert at.compute("CASSCF").energy == pytest.approx(-149.7519370276, abs=1e-6)


@pytest.mark.parametrize(("distance", "energy"), [("1.0977", -109.0900257023), ("1.6", -108.8832844863)])
def test_casscf_along_the_nitrogen_curve_is_the_check_value(distance, energy, ladder):
    # Check values E07 and E08 (own reference values, PySCF 2.14).
    at = ladder(f"N 0 0 0; N 0 0 {distance}", 6, SIX, set_="valence", core="all")
    assert at.compute("CASSCF").energy == pytest.approx(energy, abs=1e-6)


def test_a_reference_determinant_of_no_weight_is_no_obstacle(ladder):
    # The project's notes on C2 at 1.60 angstrom: the closed-shell determinant vanishes by symmetry there. The
    # lowest root of an exact solve in the optimised orbitals is the one that was optimised.
    from pyscf import fci, mcscf

    at = ladder("C 0 0 0; C 0 0 1.6", 8, range(3, 11), set_="valence", basis="6-31G")
    assert float(at.compute("CASCI").used["weight of the reference"]) < 0.1
    found = at.compute("CASSCF")
    window = mcscf.CASCI(at.bench.mean_field, 8, 8)
    one, constant = window.get_h1eff(at.bench.optimised.mo_coeff)
    solver = fci.addons.fix_spin(fci.direct_spin1.FCI(), ss=0)
    solver.nroots = 5
    lowest = solver.kernel(one, window.get_h2eff(at.bench.optimised.mo_coeff), 8, (4, 4), ecore=constant)[0][
        0
    ]
    assert found.energy == pytest.approx(lowest, abs=1e-6)


@pytest.mark.parametrize("k", [1, 3])
def test_casscf_carries_on_where_it_was_stopped(k, ladder):
    whole = ladder("N 0 0 0; N 0 0 1.6", 6, SIX, basis="6-31G").compute("CASSCF")
    first = ladder("N 0 0 0; N 0 0 1.6", 6, SIX, basis="6-31G")
    with pytest.raises(Stopped):
        first.compute("CASSCF", stop_at=k)
    second = first.again()
    found = second.compute("CASSCF")
    assert second.ears["CASSCF"].iterations[0][0] == k + 1
    assert found.iterations <= whole.iterations + 1
    assert found.energy == pytest.approx(whole.energy, abs=1e-8)
    assert f"carried on from iteration {k}" in found.notes
    assert found.used["starting orbitals"] == whole.used["starting orbitals"]


def test_optimised_orbitals_are_taken_up_again_for_nevpt2_in_two_iterations(ladder):
    first = ladder(NITROGEN, 6, SIX, basis="6-31G")
    whole = [first.compute(rung) for rung in ("CASSCF", "NEVPT2")]
    second = first.again()
    found = [second.compute(rung) for rung in ("CASSCF", "NEVPT2")]
    assert len(second.ears["CASSCF"].iterations) <= 2
    assert [one.energy for one in found] == pytest.approx([one.energy for one in whole], abs=1e-7)


@pytest.mark.parametrize("name", ["small shifted steps", "second order"])
def test_each_measure_of_the_ladder_optimises_by_itself(name, ladder, monkeypatch):
    expected = ladder(NITROGEN, 6, SIX, basis="6-31G").compute("CASSCF")
    monkeypatch.setattr(optimise, "MEASURES", tuple(m for m in optimise.MEASURES if m.name == name))
    found = ladder(NITROGEN, 6, SIX, basis="6-31G").compute("CASSCF")
    assert found.used["converged with"] == name
    assert found.energy == pytest.approx(expected.energy, abs=1e-7)


def test_the_ladder_climbs_where_a_measure_fails_and_says_when_none_helps(ladder, monkeypatch):
    crippled = tuple(
        optimise.Measure(name=m.name, cycles=1 if n < 2 else m.cycles, second_order=m.second_order)
        for n, m in enumerate(optimise.MEASURES)
    )
    monkeypatch.setattr(optimise, "MEASURES", crippled)
    at = ladder(NITROGEN, 6, SIX, basis="6-31G")
    assert at.compute("CASSCF").used["converged with"] == "second order"
    assert at.ears["CASSCF"].stages == [m.name for m in crippled]
    monkeypatch.setattr(optimise, "MEASURES", crippled[:1])
    stuck = ladder(NITROGEN, 6, SIX, basis="6-31G")
    failed = stuck.compute("CASSCF")
    assert not failed.converged
    assert "did not converge" in failed.notes[0]
    with pytest.raises(PlumbruleError, match="CASSCF did not converge for sample"):
        stuck.compute("NEVPT2")


def test_a_space_that_the_user_numbered_starts_from_just_those_orbitals(ladder):
    at = ladder(NITROGEN, 6, SIX, choice="set", basis="6-31G")
    assert (
        at.compute("CASSCF")
        .used["starting orbitals"]
        .startswith("the orbitals that the space is numbered in")
    )
    proposed = ladder(NITROGEN, 6, SIX, basis="6-31G").compute("CASSCF")
    assert proposed.used["starting orbitals"].startswith("MP2 natural orbitals")


def test_orbitals_that_change_character_and_members_without_use_are_named(ladder):
    found = ladder(NITROGEN, 6, SIX, choice="set").compute("CASSCF")
    assert any("changed character" in note for note in found.notes)
    assert any("a smaller space would do" in note for note in found.notes)
    occupations = found.arrays["active_occupations"]
    assert occupations.sum() == pytest.approx(6, abs=1e-8)
    assert np.all(np.diff(occupations) <= 0)


def test_frozen_core_nevpt2_is_that_of_a_molecule_without_the_core(ladder):
    # Independent route: a library molecule of the other electrons; its one-electron integrals hold the core.
    from pyscf import ao2mo, gto, mcscf, mrpt, scf

    at = ladder(NITROGEN, 6, SIX, basis="6-31G", set_="valence")
    at.compute("CASSCF")
    done, frozen = at.bench.optimised, at.bench.frozen
    assert frozen == 2
    orbitals = done.canonicalize(done.mo_coeff, ci=done.ci, cas_natorb=True)[0]
    core, rest = orbitals[:, :frozen], orbitals[:, frozen:]
    molecule = gto.M(verbose=0)
    molecule.nelectron, molecule.incore_anyway = 10, True
    field = scf.RHF(molecule)
    with_core = done.get_hcore() + done.get_veff(at.bench.molecule, 2 * core @ core.T)
    field.get_hcore = lambda *_: rest.T @ with_core @ rest
    field.get_ovlp = lambda *_: np.eye(rest.shape[1])
    field._eri = ao2mo.full(at.bench.molecule, rest)
    window = mcscf.CASCI(field, 6, 6)
    window.kernel(np.eye(rest.shape[1]))
    correction = float(at.compute("NEVPT2").used["correction to CASSCF"].split()[0])
    assert correction == pytest.approx(mrpt.NEVPT(window).kernel(), abs=1e-6)


def test_density_fitting_moves_each_rung_by_less_than_a_millihartree(ladder):
    plain, fitted = (ladder(NITROGEN, 6, SIX, set_="valence", density_fitting=on) for on in (False, True))
    for rung in ("CASCI", "CASSCF", "NEVPT2"):
        shift = fitted.compute(rung).energy - plain.compute(rung).energy
        assert 1e-7 < abs(shift) < 1e-3, rung


def test_without_an_active_orbital_the_rungs_are_those_of_one_determinant(ladder):
    # Theory: an empty space leaves Hartree-Fock, and NEVPT2 on it is MP2.
    at = ladder(NITROGEN, 0, ())
    field = at.bench.mean_field.e_tot
    for rung in ("CASCI", "CASSCF"):
        assert at.compute(rung).energy == pytest.approx(field, abs=1e-9)
    assert at.compute("NEVPT2").energy == pytest.approx(at.compute("MP2").energy, abs=1e-8)


def test_single_electrons_are_active_even_where_no_space_is_needed(ladder):
    from pyscf import gto, scf

    xyz = "O 0 0 0; H 0 0 1.0"
    at = ladder(xyz, 0, (), basis="6-31G", multiplicity=2)
    expected = scf.ROHF(gto.M(atom=xyz, basis="6-31g", spin=1, verbose=0)).run(conv_tol=1e-11).e_tot
    for rung in ("CASCI", "CASSCF"):
        assert at.compute(rung).energy == pytest.approx(expected, abs=1e-7)
    assert at.compute("NEVPT2").energy < expected - 0.05


def test_every_orbital_active_is_full_ci_on_every_rung(ladder):
    at = ladder("Li 0 0 0; H 0 0 1.6", 4, range(1, 7), basis="STO-3G", core="all")
    exact = at.compute("FCI").energy
    for rung in ("CASCI", "CASSCF", "NEVPT2"):
        assert at.compute(rung).energy == pytest.approx(exact, abs=1e-9)


@pytest.mark.skipif(bool(SOLVERS["DMRG"].missing()), reason="the DMRG engine is not installed")
def test_dmrg_of_a_small_space_is_its_exact_solution(ladder):
    at = ladder(OXYGEN, 8, SIX, basis="6-31G", multiplicity=3, set_="valence")
    assert at.compute("DMRG").energy == pytest.approx(at.compute("CASCI").energy, abs=1e-7)


@pytest.mark.slow
def test_casci_of_ten_electrons_in_twelve_orbitals_is_the_check_value(ladder):
    # Check value A02 (own, PySCF 2.14; DMRG identical): N2 at 2.118 bohr, (10e,12o) in RHF orbitals.
    from plumbrule_core.rungs.published_systems import from_bohr

    at = ladder(from_bohr("N 0 0 0; N 0 0 2.118"), 10, (*range(3, 15),))
    assert at.compute("CASCI").energy == pytest.approx(-109.099687575, abs=1e-7)


REFUSED = [
    (4, SIX, 1, "hold 6 electrons in the reference, not 4"),
    (6, (5, 6, 7, 8, 9, 99), 1, "numbered from 1 to 18"),
    (6, (5, 5, 7, 8, 9, 10), 1, "different orbitals"),
    (6, (5, 6, 9, 10), 3, "leaves out orbital 7"),
]


@pytest.mark.parametrize(("electrons", "orbitals", "multiplicity", "words"), REFUSED)
def test_a_space_that_cannot_be_is_refused_with_what_is_wrong(
    electrons, orbitals, multiplicity, words, ladder
):
    at = ladder(NITROGEN, electrons, orbitals, basis="6-31G", multiplicity=multiplicity)
    for rung in ("CASCI", "CASSCF", "DMRG"):
        with pytest.raises(PlumbruleError, match=words):
            at.compute(rung)


def test_a_wave_function_beyond_memory_is_refused_with_its_count_in_words(ladder):
    at = ladder(NITROGEN, 10, range(3, 19), basis="6-31G")
    at.memory_mb = 500
    for rung in ("CASCI", "CASSCF"):
        with pytest.raises(PlumbruleError, match=r"19\.1 million determinants and needs .* GB of memory"):
            at.compute(rung)
    with pytest.raises(PlumbruleError, match=r"10 correlated electrons in 16 orbitals has 19\.1 million"):
        at.compute("FCI")


def test_without_a_space_or_without_casscf_the_reason_is_said(ladder):
    at = ladder(NITROGEN, 6, SIX, basis="6-31G")
    with pytest.raises(PlumbruleError, match="CASSCF has not been computed"):
        at.compute("NEVPT2")
    at.bench.space = None
    with pytest.raises(PlumbruleError, match="no active space has been chosen for sample"):
        at.compute("CASSCF")
