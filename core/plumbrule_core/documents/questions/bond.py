"""The energy of a bond: the fragments minus the molecule."""

from collections.abc import Collection
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from plumbrule_core.documents.bonding import bonds, distance, pieces
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase, unbalanced
from plumbrule_core.documents.species import NAME_LENGTH, Atom, Species

AtomNumber = Annotated[int, Field(ge=1)]


class BondQuestion(QuestionBase):
    """`cut` names the two bonded atoms (from 1), or `fragments` names the two species that are left."""

    label: ClassVar[str] = "bond energy"
    energy_class: ClassVar[str] = "atomisation"

    kind: Literal["bond"] = "bond"
    species: str
    cut: tuple[int, int] | None = None
    fragments: tuple[str, str] | None = None
    fragment_multiplicities: tuple[AtomNumber, AtomNumber] | None = None

    def named(self) -> tuple[tuple[str, str], ...]:
        """The molecule, and the fragments where they are given."""
        fragments = tuple((f"fragments.{i}", name) for i, name in enumerate(self.fragments or (), start=1))
        return (("species", self.species), *fragments)

    def value_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """Neither a cut nor fragments, or both; a cut between an atom and itself."""
        if (self.cut is None) == (self.fragments is None):
            says = "a bond needs either cut = [1, 2] or fragments = ['a', 'b']"
            return (Fault(where="question", says=says),)
        if self.cut and self.cut[0] == self.cut[1]:
            return (Fault(where="question.cut", says="a bond is between two different atoms"),)
        return ()

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """A cut that is none, fragments that do not add up."""
        off = self._fragment_faults(species) if self.fragments else ()
        return off + self._cut_faults(species[self.species])

    def _fragment_faults(self, species: Many) -> tuple[Fault, ...]:
        whole, parts = species[self.species], tuple(species[name] for name in self.fragments or ())
        off = unbalanced((whole,), parts, "question.fragments")
        if sum(part.charge for part in parts) != whole.charge:
            off += (
                Fault(where="question.fragments", says=f"the charges do not add up to that of {whole.name}"),
            )
        return off

    def _cut_faults(self, whole: Species) -> tuple[Fault, ...]:
        if self.cut is None:
            return ()
        where = "question.cut"
        outside = [str(number) for number in self.cut if not 1 <= number <= len(whole.atoms)]
        if outside:
            says = f"there is no atom {' and no atom '.join(outside)}: {whole.name} has {_atoms_of(whole)}"
            return (Fault(where=where, says=says),)
        first, second = self.cut
        if first == second:
            return ()
        if whole.charge:
            says = (
                f"{whole.name} is charged, so the fragments' charges are not clear; name them with fragments"
            )
            return (Fault(where=where, says=says),)
        i, j = sorted((first - 1, second - 1))
        links = bonds(whole.atoms)
        if (i, j) not in links and len(pieces(len(whole.atoms), links)) == 1:
            apart = distance(whole.atoms[i], whole.atoms[j])
            pair = f"atoms {first} and {second} of {whole.name}"
            says = f"{pair} are not bonded: they are {apart:.2f} angstrom apart"
            return (Fault(where=where, says=says),)
        if len(self._sides(whole)) != 2:
            says = f"cutting {first}-{second} does not leave two pieces: it is in a ring, or a piece is loose"
            return (Fault(where=where, says=says),)
        return tuple(fault for part in self._cut_species(whole) for fault in self._spin_faults(part))

    @staticmethod
    def _spin_faults(part: Species) -> tuple[Fault, ...]:
        return tuple(Fault(where="question.fragment_multiplicities", says=f.says) for f in part.faults())

    def _sides(self, whole: Species) -> tuple[tuple[int, ...], ...]:
        first, second = self.cut or (1, 1)
        i, j = sorted((first - 1, second - 1))
        left = tuple(link for link in bonds(whole.atoms) if link != (i, j))
        sides = pieces(len(whole.atoms), left)
        return tuple(sorted(sides, key=lambda side: first - 1 not in side))

    def _cut_species(self, whole: Species) -> tuple[Species, ...]:
        """The fragments; two atoms alike are one species, so that they are computed and judged once."""
        cut = tuple(
            _fragment(whole, side, (self.fragment_multiplicities or (None, None))[place])
            for place, side in enumerate(self._sides(whole))
        )
        return tuple({part.content: part for part in reversed(cut)}[part.content] for part in cut)

    def parts(self, species: Many) -> tuple[Part, ...]:
        """Both fragments minus the molecule."""
        whole = species[self.species]
        named = tuple(species[name] for name in self.fragments or ())
        pair = named or self._cut_species(whole)
        return (
            *(Part(coefficient=1.0, species=part) for part in pair),
            Part(coefficient=-1.0, species=whole),
        )

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """`of N-N in hydrazine`."""
        return (
            Clause(text=" of "),
            Clause(text=self._bond_words(species), key="cut"),
            Clause(text=" in "),
            Clause(text=self.species, key="species"),
        )

    def _bond_words(self, species: Many) -> str:
        whole = species.get(self.species)
        if self.cut and whole and all(1 <= number <= len(whole.atoms) for number in self.cut):
            first, second = self.cut
            return f"{whole.atoms[first - 1].symbol}{first}-{whole.atoms[second - 1].symbol}{second}"
        return " and ".join(self.fragments or ("a bond",))


def _atoms_of(whole: Species) -> str:
    return f"atoms 1 to {len(whole.atoms)}" if len(whole.atoms) > 1 else "1 atom"


def _fragment(whole: Species, side: tuple[int, ...], multiplicity: int | None) -> Species:
    atoms = tuple(whole.atoms[place] for place in side)
    if len(atoms) == 1:
        # An atom has the same energy everywhere: at one place, two alike are computed once.
        atoms = (Atom(symbol=atoms[0].symbol, x=0.0, y=0.0, z=0.0),)
    return Species(
        name=_fragment_name(whole.name, [place + 1 for place in side]),
        atoms=atoms,
        charge=0,
        multiplicity=multiplicity or ground_multiplicity(atoms, 0),
        origin=f"cut from {whole.name}, not relaxed",
    )


def _fragment_name(whole: str, numbers: list[int]) -> str:
    """`ethane, atoms 1 and 3-5`: the whole's name is shortened, never the numbers, which tell two apart."""
    listed = _ranges(numbers)
    if len(listed) > NAME_LENGTH // 2:
        listed = f"from {numbers[0]}, {len(numbers)} in all"
    ending = f", {'atom' if len(numbers) == 1 else 'atoms'} {listed}"
    return whole[: NAME_LENGTH - len(ending)] + ending


def _ranges(numbers: list[int]) -> str:
    """`1, 3-5 and 8` of rising numbers."""
    runs: list[list[int]] = []
    for number in numbers:
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    words = [word for run in runs for word in _run(run)]
    return " and ".join(filter(None, (", ".join(words[:-1]), words[-1])))


def _run(run: list[int]) -> list[str]:
    return [f"{run[0]}-{run[-1]}"] if len(run) > 2 else [str(number) for number in run]
