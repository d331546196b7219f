from types import SimpleNamespace

from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import Edit
from plumbrule_desktop.state.answer_text import answer_text, target_words
from plumbrule_desktop.state.difference import differences


def test_a_changed_basis_is_said_with_the_old_and_the_new(made: SimpleNamespace):
    before = made.nitrogen()
    after = edited(before, (Edit(path="recipe.basis", value=["cc-pVQZ"]),))
    assert differences(before, after) == ("basis: cc-pVTZ \u2192 cc-pVQZ",)
    assert differences(before, before) == ()


def test_a_changed_spin_state_names_its_species(made: SimpleNamespace):
    before = made.nitrogen()
    after = edited(before, (Edit(path="species.N atom.multiplicity", value=2),))
    assert differences(before, after) == ("N atom, multiplicity: 4 \u2192 2",)


def test_moved_atoms_are_said(made: SimpleNamespace):
    assert differences(made.nitrogen(1.1), made.nitrogen(1.2)) == ("nitrogen: its atoms",)


def test_the_copied_answer_holds_number_verdict_reasons_and_the_caution(made: SimpleNamespace):
    text = answer_text(made.nitrogen(), made.judged())
    assert "CCSD(T)/cc-pVTZ: 937 +/- 12 kJ/mol" in text
    assert "Verdict: take care." in text
    assert "- T1 of nitrogen is 0.024, over 0.02" in text
    assert "qualified person" in text


def test_a_number_not_to_be_relied_on_is_copied_without_a_bar_and_says_so(made: SimpleNamespace):
    text = answer_text(made.nitrogen(), made.judged("do not rely on it"))
    assert "936.9 kJ/mol - DO NOT RELY ON THIS NUMBER" in text
    assert "+/-" not in text


def test_no_answer_is_said_as_such(made: SimpleNamespace):
    assert answer_text(made.nitrogen(), None).endswith("No answer yet.")


def test_the_bar_is_held_against_the_accuracy_needed(made: SimpleNamespace):
    assert (
        target_words(made.nitrogen(), made.judged()) == "This is wider than the 4 kJ/mol that you asked for."
    )
