"""Every rung reproduces the published energies that stand in its file, each with its source there."""

import json
import re
from dataclasses import replace
from pathlib import Path

import pytest

from plumbrule_core.basis_sets import find
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.published_systems import WATER_OLSEN

CASES = [
    pytest.param(
        name,
        value,
        id=f"{name}-{value.check or value.basis}-{number}",
        marks=[pytest.mark.slow] if value.slow else [],
    )
    for name, rung in RUNGS.items()
    for number, value in enumerate(rung.published)
]


@pytest.mark.parametrize(("name", "value"), CASES)
def test_a_rung_reproduces_its_published_energies(name, value, climb):
    climbed = climb(
        value.xyz,
        name,
        basis=value.basis,
        core=value.core,
        charge=value.charge,
        multiplicity=value.multiplicity,
        space=value.space,
    )
    assert climbed.energy(name) == pytest.approx(value.energy, abs=value.atol), value.source


def test_every_rung_carries_published_values_with_a_source():
    for rung in RUNGS.values():
        assert len(rung.published) >= 2, rung.name
        assert all(value.source and value.atol > 0 for value in rung.published)


def test_the_cartesian_flag_of_a_published_value_is_what_the_basis_does():
    values = [value for rung in RUNGS.values() for value in rung.published]
    flagged = {value.basis for value in values if value.cartesian}
    assert flagged, "no published value has Cartesian functions"
    assert all(find(name).cartesian for name in flagged)
    # Without d functions, as for hydrogen alone or in an unpolarised set, both kinds are the same.
    spherical = {value.basis for value in values if not value.cartesian and holds_d_functions(value)}
    assert not any(find(name).cartesian for name in spherical)


def holds_d_functions(value):
    symbols = {line.split()[0] for line in value.xyz.splitlines()}
    return find(value.basis).polarised and bool(symbols - {"H", "He"})


CHECKS = {
    entry["id"]: entry
    for entry in json.loads(Path(__file__).with_name("check_values.json").read_text(encoding="utf-8"))
}
"""The energies in hartree of the check values that came with the specification, word for word."""
CHECKED = [
    pytest.param(name, value, checks, id=f"{name}-{value.check}")
    for name, rung in RUNGS.items()
    for value in rung.published
    if (checks := tuple(part.strip() for part in value.check.split(",") if part.strip()))
]
NAMED_FOR_THE_SYSTEM = {("HF", "F16")}
"""The entry gives correlation energies alone; the field below them is compared with the bare library."""


def totals_of(name, value, entry):
    """The total energies that an entry gives, those of its own recomputation included."""
    stated = entry["value"] if isinstance(entry["value"], list) else [entry["value"]]
    found = [*stated, *map(float, re.findall(r"-\d+\.\d{6,}", entry["verified"]))]
    if entry["method"] == "size extensivity":
        return [3 * atom + excess for atom in found for excess in stated]
    if name == "TCCSD(T)" and "(T) increment" in entry["quantity"]:
        return [stated[1] + stated[2]]
    if "corr" not in entry["quantity"]:
        return found
    of_field = RUNGS["HF"].published
    fields = [one.energy for one in of_field if (one.xyz, one.basis) == (value.xyz, value.basis)]
    fields += stated[:1] if "total" in entry["quantity"] else []
    if name == "CCSD(T)" and "(T) increment" in entry["quantity"]:
        at = entry["quantity"].split("[")[1].rstrip("]").split(", ")
        doubles = next(n for n, part in enumerate(at) if part.startswith("CCSD"))
        return [field + stated[doubles] + stated[at.index("(T) increment")] for field in fields]
    return [*found, *(field + part for field in fields for part in found)]


@pytest.mark.parametrize(("name", "value", "checks"), CHECKED)
def test_a_published_energy_is_the_check_value_that_it_names(name, value, checks):
    assert CHECKS.keys() >= set(checks), "copy the entry into check_values.json"
    if (name, value.check) in NAMED_FOR_THE_SYSTEM:
        return
    totals = [total for check in checks for total in totals_of(name, value, CHECKS[check])]
    assert min(abs(total - value.energy) for total in totals) <= value.atol


def test_a_published_energy_that_is_mistyped_is_noticed():
    value = replace(WATER_OLSEN.gives(-76.024139), check="F02")
    assert min(abs(total - value.energy) for total in totals_of("HF", value, CHECKS["F02"])) > value.atol


# A. Halkier et al., Chem. Phys. Lett. 286, 243 (1998): frozen-core CCSD correlation energies in millihartree,
# three decimals as printed (check values X01 and X02).
HALKIER = [
    ("Ne 0 0 0", "cc-pVDZ", -189.017),
    ("Ne 0 0 0", "cc-pVTZ", -266.347),
    ("O 0 0 0; H 0.9572 0 0; H -0.2399872 0 0.9266272", "cc-pVDZ", -211.188),
    ("O 0 0 0; H 0.9572 0 0; H -0.2399872 0 0.9266272", "cc-pVTZ", -267.378),
]


@pytest.mark.parametrize(("xyz", "basis", "millihartree"), HALKIER)
def test_ccsd_correlation_energies_are_those_of_the_extrapolation_papers(xyz, basis, millihartree, climb):
    outcome = climb(xyz, "CCSD", basis=basis).outcomes["CCSD"]
    assert 1000 * outcome.correlation == pytest.approx(millihartree, abs=6e-4)


def test_rohf_based_coupled_cluster_of_the_carbon_atom_is_the_published_one(climb):
    # A. Karton's worked example of %TAE[(T)] (check value D16): C, cc-pVTZ, frozen core, ROHF-based.
    climbed = climb("C 0 0 0", "CCSD(T)", basis="cc-pVTZ", multiplicity=3, reference="ROHF")
    assert climbed.energy("CCSD") == pytest.approx(-37.778529074216, abs=2e-8)
    assert climbed.energy("CCSD(T)") == pytest.approx(-37.780664543434, abs=2e-8)


def test_rohf_of_methylene_is_the_reference_value(climb):
    # Check value C12 (own reference, PySCF 2.14.0): C-H 1.0 angstrom, 125 degrees, six d functions.
    xyz = "C 0 0 0; H 1.0 0 0; H -0.5735764364 0 0.8191520443"
    climbed = climb(xyz, "HF", basis="6-31G**", multiplicity=3, reference="ROHF")
    assert climbed.energy("HF") == pytest.approx(-38.911369348, abs=1e-7)
    assert climbed.outcomes["HF"].reference == "ROHF"


def test_m06_2x_binds_the_hydrogen_molecule_as_strongly_as_measured(climb):
    # D_e of H2 is 109.5 kcal/mol (W. Kolos and L. Wolniewicz 1968, from memory); it is good to about 2.
    atom = climb("H 0 0 0", "M06-2X", basis="cc-pVTZ", multiplicity=2).energy("M06-2X")
    molecule = climb("H 0 0 0; H 0 0 0.7414", "M06-2X", basis="cc-pVTZ").energy("M06-2X")
    assert 627.5095 * (2 * atom - molecule) == pytest.approx(109.5, abs=3)
