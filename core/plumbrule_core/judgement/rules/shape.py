"""Geometry: what can be seen before anything is computed."""

from plumbrule_core.documents.findings import Edit, Evidence, Finding, Remedy
from plumbrule_core.documents.species import Species
from plumbrule_core.geometry.shape import (
    CLASH_SHARE,
    PARTED_SHARE,
    STRETCHED_SHARE,
    TWIST_LIMIT,
    clashes,
    in_bohr_as_angstrom,
    looks_like_bohr,
    parted_bonds,
    stretched_bonds,
    twisted_double_bonds,
)
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import active_space, advice

PRACTICE = "common practice, no source"


def pair_name(species: Species, first: int, second: int) -> str:
    """`N1-N2`, atoms counted from 1."""
    return f"{species.atoms[first].symbol}{first + 1}-{species.atoms[second].symbol}{second + 1}"


def _clash(case: Case, view: SpeciesView) -> Finding | None:
    found = clashes(view.species)
    if not found:
        return None
    worst = min(found, key=lambda pair: pair.share)
    name = pair_name(view.species, worst.first, worst.second)
    return Finding(
        code="atoms-clash",
        severity="stop",
        species=view.name,
        headline=f"Atoms of {view.name} lie on top of each other: {name} is {worst.distance:.2f} angstrom.",
        consequence="No molecule has such a distance, so the number describes nothing.",
        evidence=(
            Evidence(
                reading=f"distance {name}",
                value=worst.distance,
                threshold=CLASH_SHARE * worst.normal,
                unit="angstrom",
                source=PRACTICE,
            ),
        ),
        remedies=(advice("Correct the coordinates, or build the molecule anew"),),
    )


def _bohr(case: Case, view: SpeciesView) -> Finding | None:
    if not looks_like_bohr(view.species):
        return None
    certain = len(view.species.atoms) > 2
    return Finding(
        code="looks-like-bohr",
        severity="care" if certain else "note",
        species=view.name,
        headline=f"The distances of {view.name} look as if they were in bohr.",
        consequence=(
            "Every bond is nearly twice its normal length; as it stands, the number is that of a "
            "molecule torn apart."
            if certain
            else "With two atoms this cannot be told from one stretched bond; only you know which it is."
        ),
        evidence=(
            Evidence(
                reading="every nearest distance",
                value="1.45 to 2.4 times the normal one",
                source="arithmetic",
            ),
        ),
        remedies=_from_bohr(case, view.species),
    )


def _from_bohr(case: Case, species: Species) -> tuple[Remedy, ...]:
    if species.name not in case.brief.by_name:
        return ()
    converted = in_bohr_as_angstrom(species).to_data()
    edits = tuple(
        Edit(path=f"species.{species.name}.{key}", value=converted[key]) for key in ("atoms", "origin")
    )
    return (Remedy(label=f"Take the numbers of {species.name} as bohr", edits=edits),)


def _stretched(case: Case, view: SpeciesView) -> Finding | None:
    found = stretched_bonds(view.species)
    if not found:
        return None
    worst = max(found, key=lambda pair: pair.share)
    name = pair_name(view.species, worst.first, worst.second)
    return Finding(
        code="bond-stretched",
        severity="care",
        species=view.name,
        rungs=case.doubtful(view),
        headline=f"{name} in {view.name} is stretched to {worst.share:.2f} times its normal length.",
        consequence=_on_breaking(view),
        evidence=(
            Evidence(
                reading=f"distance {name}",
                value=worst.distance,
                threshold=STRETCHED_SHARE * worst.normal,
                unit="angstrom",
                source=PRACTICE,
            ),
        ),
        remedies=active_space(case),
    )


def _on_breaking(view: SpeciesView) -> str:
    if view.exact_from_ccsd:
        return "HF and MP2 fail on breaking bonds; with two electrons, CCSD is exact all the same."
    return "Methods on one determinant fail on breaking bonds, and CCSD(T) can fall far below the two halves."


def _parted(case: Case, view: SpeciesView) -> Finding | None:
    found = parted_bonds(view.species) if view.closed_shell else ()
    touched = case.doubtful(view)
    if not found or not touched:
        return None
    nearest = min(found, key=lambda pair: pair.share)
    name = pair_name(view.species, nearest.first, nearest.second)
    return Finding(
        code="bond-parted",
        severity="care",
        species=view.name,
        rungs=touched,
        headline=f"{name} in {view.name} is stretched to {nearest.share:.1f} times its normal length: the "
        "bond is broken.",
        consequence=f"Each half keeps electrons of the pair, and a singlet of both needs more than one "
        f"determinant. {_on_breaking(view)}",
        evidence=(
            Evidence(
                reading=f"distance {name}",
                value=nearest.distance,
                threshold=PARTED_SHARE * nearest.normal,
                unit="angstrom",
                source=PRACTICE,
            ),
        ),
        remedies=active_space(case),
    )


def _twisted(case: Case, view: SpeciesView) -> Finding | None:
    found = twisted_double_bonds(view.species)
    if not found:
        return None
    worst = max(found, key=lambda twist: twist.angle)
    name = pair_name(view.species, worst.first, worst.second)
    return Finding(
        code="double-bond-twisted",
        severity="care",
        species=view.name,
        rungs=case.single_reference,
        headline=f"The double bond {name} of {view.name} is twisted by {worst.angle:.0f} degrees.",
        consequence="Its second pair is breaking; towards 90 degrees one determinant no longer describes it.",
        evidence=(
            Evidence(
                reading=f"twist {name}",
                value=worst.angle,
                threshold=TWIST_LIMIT,
                unit="degrees",
                source=PRACTICE,
            ),
        ),
        remedies=active_space(case),
    )


def _ethylene(twist: str) -> Example:
    return Example(molecules={"ethylene": Molecule(xyz=twist)})


def _one(xyz: str) -> Example:
    return Example(molecules={"molecule": Molecule(xyz=xyz)})


_WATER = "O 0 0 0.1173; H 0 0.7572 -0.4692; H 0 -0.7572 -0.4692"
_WATER_IN_BOHR = "O 0 0 0.2217; H 0 1.4309 -0.8867; H 0 -1.4309 -0.8867"
_PEROXIDE = "O 0 0.7264 -0.0555; O 0 -0.7264 -0.0555; H 0.8 0.88 0.444; H -0.8 -0.88 0.444"
_FLAT = "C 0 0 0; C 0 0 1.339; H 0 0.929 -0.565; H 0 -0.929 -0.565; H 0 0.929 1.904; H 0 -0.929 1.904"
_TWISTED = "C 0 0 0; C 0 0 1.339; H 0 0.929 -0.565; H 0 -0.929 -0.565; H 0.929 0 1.904; H -0.929 0 1.904"

RULES = (
    Rule(
        code="atoms-clash",
        severity="stop",
        stage="always",
        reads=("atoms",),
        source=PRACTICE,
        judge=each(_clash),
        quiet=(_one(_WATER), _one("N 0 0 0")),
        loud=(_one("O 0 0 0; H 0 0 0.3; H 0 0.76 -0.6"),),
    ),
    Rule(
        code="looks-like-bohr",
        severity="care",
        stage="always",
        reads=("atoms",),
        source="arithmetic",
        judge=each(_bohr),
        quiet=(_one(_WATER), _one("N 0 0 0")),
        loud=(_one(_WATER_IN_BOHR),),
    ),
    Rule(
        code="bond-stretched",
        severity="care",
        stage="always",
        reads=("atoms",),
        source=PRACTICE,
        judge=each(_stretched),
        quiet=(_one(_WATER), _one("N 0 0 0; N 0 0 1.3")),
        loud=(_one("N 0 0 0; N 0 0 2.0"),),
    ),
    Rule(
        code="bond-parted",
        severity="care",
        stage="always",
        reads=("atoms",),
        source=PRACTICE,
        judge=each(_parted),
        quiet=(
            _one(_WATER),
            _one("N 0 0 0; N 0 0 2.0"),
            _one(f"{_WATER}; O 0 0 4.1173; H 0 0.7572 3.5308; H 0 -0.7572 3.5308"),
            Example(molecules={"h2": Molecule(xyz="H 0 0 0; H 0 0 3.0", multiplicity=3)}),
        ),
        loud=(_one("H 0 0 0; H 0 0 3.0"), _one("N 0 0 0; N 0 0 6.0")),
    ),
    Rule(
        code="double-bond-twisted",
        severity="care",
        stage="always",
        reads=("atoms",),
        source=PRACTICE,
        judge=each(_twisted),
        quiet=(_ethylene(_FLAT), _one(_PEROXIDE)),
        loud=(_ethylene(_TWISTED),),
    ),
)
