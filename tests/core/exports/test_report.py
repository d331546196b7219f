"""The report says the answer and its verdict first, and then all that is needed to repeat it."""

import base64
import math
import re
import tomllib
from dataclasses import replace
from html import unescape
from html.parser import HTMLParser
from xml.etree import ElementTree

import pytest

from plumbrule_core.documents.findings import Remedy
from plumbrule_core.documents.results import Reading
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.exports import EXPORTS, figures, words
from plumbrule_core.exports.checks import checks_of
from plumbrule_core.judgement.rules import RULES
from plumbrule_core.judgement.thresholds import THRESHOLDS


def page_of(record):
    return EXPORTS[".html"].write(record).decode()


def plain(page):
    return " ".join(unescape(re.sub(r"<[^>]+>", " ", page.partition("</style>")[2])).split())


class Balanced(HTMLParser):
    """Fails on a tag that is closed out of order."""

    VOID = ("meta", "img", "br")

    def __init__(self):
        super().__init__()
        self.open = []
        self.links = []

    def handle_starttag(self, tag, attrs):
        self.links += [value for key, value in attrs if key in ("src", "href")]
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag


@pytest.mark.parametrize("kind", ["record", "empty_record", "unasked_record"])
def test_the_page_is_well_formed_and_needs_nothing_beside_it(kind, request):
    reader = Balanced()
    page = page_of(request.getfixturevalue(kind))
    reader.feed(page)
    assert reader.open == []
    assert reader.links
    assert all(link.startswith("data:image/svg+xml;base64,") for link in reader.links)
    assert "<script" not in page
    assert "url(" not in page


def test_the_answer_and_the_verdict_stand_before_everything_else(record):
    text = plain(page_of(record))
    places = [
        text.index(words)
        for words in (
            "432 ± 12 kJ/mol",
            "Take care: T1 is large.",
            "does not replace measurement",
            "What was found",
        )
    ]
    assert places == sorted(places)
    assert "not within the 4 kJ/mol asked for" in text


def test_everything_that_another_group_needs_is_there(record):
    text = plain(page_of(record))
    for needed in (
        "−1.16340000",
        "0.741235",
        "Charge 0; singlet, no unpaired electron",
        "doublet, 1 unpaired electron",
        "cc-pVDZ",
        "Version of pyscf 2.14.0",
        "2 cores, 24.6 GB",
        "C. Itation, J. Chem. Phys. 1, 1 (1999)",
        "T1: Lee and Taylor, Int. J. Quantum Chem. Symp. 23, 199 (1989)",
        "Add the next basis set",
        "The answer is electronic.",
        "All 4 calculations ended and converged.",
        "judgement of a qualified person",
    ):
        assert needed in text


def test_the_question_inside_the_report_runs_again(record):
    toml = unescape(page_of(record).partition("<pre>")[2].partition("</pre>")[0])
    assert tomllib.loads(toml)["question"]["kind"] == "reaction"
    assert toml == EXPORTS[".toml"].write(record).decode()


def test_what_did_not_end_is_said(empty_record):
    text = plain(page_of(empty_record))
    assert "No answer yet" in text
    assert "4 of 4 calculations did not end well" in text


def test_why_nothing_can_be_run_is_said(unasked_record):
    assert "no question is asked yet" in plain(page_of(unasked_record))


def test_a_failed_check_is_told_from_a_passed_one(record):
    found = {
        check.reading: check
        for check in checks_of(record.brief.species[1], record.judgement.species[0].readings)
    }
    # T1 of a closed shell: 0.02, Lee and Taylor, Int. J. Quantum Chem. Symp. 23, 199 (1989).
    assert (found["T1"].limit, found["T1"].passed) == (0.02, False)
    # D1: 0.05, Janssen and Nielsen, Chem. Phys. Lett. 290, 423 (1998).
    assert (found["D1"].limit, found["D1"].passed) == (0.05, True)
    assert found["stable"].passed


def test_the_limit_of_t1_is_that_of_the_kind_of_species():
    iron = Species(name="fe", atoms=(Atom(symbol="Fe", x=0, y=0, z=0),), multiplicity=5)
    radical = Species(name="h", atoms=(Atom(symbol="H", x=0, y=0, z=0),), multiplicity=2)
    reading = (Reading(name="T1", value=0.03),)
    limits = [next(checks_of(one, reading)).limit for one in (radical, iron)]
    # Open shells 0.044 (Rienstra-Kiracofe et al. 2000), 3d metals 0.05 (Jiang, DeYonker, Wilson 2012).
    assert limits == [0.044, 0.05]


GRADED = {
    "%TAE[(T)]": (4.0, 12.0),  # 5 and 10 %, Karton et al., J. Chem. Phys. 125, 144108 (2006)
    "c0_squared": (0.95, 0.85),  # 0.90, Lee, Rice, Scuseria and Schaefer (1989)
    "mp2_largest_t2": (0.05, 0.15),  # 0.1, common practice, no source
    "largest_t2": (0.05, 0.15),
    "M": (0.05, 0.2),
    "s2_excess": (0.01, 0.3),
    "share_of_triples": (0.03, 0.09),
}


@pytest.mark.parametrize("name", GRADED)
def test_a_check_fails_where_the_verdict_objects(name):
    h2 = Species(name="h2", atoms=(Atom(symbol="H", x=0, y=0, z=0), Atom(symbol="H", x=0, y=0, z=0.7)))
    calm, raised = (next(checks_of(h2, (Reading(name=name, value=v),))) for v in GRADED[name])
    assert calm.passed
    assert not raised.passed
    assert raised.limit in {limit.value for limit in THRESHOLDS.values()}


def test_the_amplitudes_of_mp2_are_no_check_where_those_of_ccsd_are_judged():
    h2 = Species(name="h2", atoms=(Atom(symbol="H", x=0, y=0, z=0),), multiplicity=2)
    both = (Reading(name="mp2_largest_t2", value=0.3), Reading(name="largest_t2", value=0.05))
    assert [(check.reading, check.passed) for check in checks_of(h2, both)] == [("largest_t2", True)]


def test_a_gap_below_its_limit_fails():
    h2 = Species(name="h2", atoms=(Atom(symbol="H", x=0, y=0, z=0), Atom(symbol="H", x=0, y=0, z=0.7)))
    low, high = (
        next(checks_of(h2, (Reading(name="homo_lumo_gap", value=v, unit="eV"),))) for v in (1.0, 9.0)
    )
    assert not low.passed
    assert high.passed


def drawing(page, place):
    data = re.findall(r'src="data:image/svg\+xml;base64,([^"]+)"', page)[place]
    return ElementTree.fromstring(base64.b64decode(data))


def test_the_plumb_line_hangs_straight_only_for_sound():
    def lean(level):
        return float(re.search(r"rotate\((-?[\d.]+)", figures.plumb_line(level))[1])

    assert lean("sound") == 0
    assert 5 < abs(lean("take care")) < abs(lean("do not rely on it")) < 90


def test_the_comparison_draws_one_point_a_rung_in_the_order_of_their_values(record):
    root = drawing(page_of(record), 1)
    svg = "{http://www.w3.org/2000/svg}"
    places = [float(circle.get("cx")) for circle in root.iter(f"{svg}circle")]
    assert len(places) == 2
    assert places[0] < places[1]
    (band,) = root.iter(f"{svg}rect")
    assert float(band.get("x")) < places[1] < float(band.get("x")) + float(band.get("width"))


def test_the_longest_bar_of_the_budget_is_the_largest_cause(record):
    root = drawing(page_of(record), 2)
    widths = [float(box.get("width")) for box in root.iter("{http://www.w3.org/2000/svg}rect")]
    assert widths[0] / widths[1] == pytest.approx(12.0 / 0.6, rel=0.01)


def test_ticks_are_round_and_inside():
    assert figures.ticks(0.0, 10.0) == (0.0, 2.0, 4.0, 6.0, 8.0, 10.0)
    assert figures.ticks(-0.7, 0.9) == (-0.5, 0.0, 0.5)
    assert figures.ticks(3.0, 3.0) == (3.0,)


@pytest.mark.parametrize(
    ("value", "bar", "unit", "text"),
    [
        (941.234, 6.34, "kJ/mol", "941.2 ± 6.3 kJ/mol"),
        (941.234, 63.4, "kJ/mol", "941 ± 63 kJ/mol"),
        (-40.44, None, "kJ/mol", "−40.4 kJ/mol"),
        (0.4321, 0.012, "eV", "0.432 ± 0.012 eV"),
        (-0.001, None, "kJ/mol", "0.0 kJ/mol"),
    ],
)
def test_an_answer_has_the_digits_of_its_bar(value, bar, unit, text):
    assert words.answer(value, bar, unit) == text


def test_times_and_sizes_are_said_as_people_say_them():
    assert [words.duration(s) for s in (0.42, 75, 720, 12600)] == ["0.4 s", "75 s", "12 min", "3.5 h"]
    assert [words.reading(v) for v in (True, 0.0314159, 2e-5, -652.7076)] == [
        "yes",
        "0.03142",
        "2.0e-05",
        "−652.7",
    ]


@pytest.mark.parametrize("level", sorted(figures.LEANS))
def test_the_bob_hangs_inside_its_frame(level):
    root = ElementTree.fromstring(figures.plumb_line(level))
    frame = root.find("{http://www.w3.org/2000/svg}rect")
    left, top = float(frame.get("x")), float(frame.get("y"))
    right, bottom = left + float(frame.get("width")), top + float(frame.get("height"))
    angle = math.radians(-figures.LEANS[level][0])
    path = next(root.iter("{http://www.w3.org/2000/svg}path")).get("d")
    for x, y in re.findall(r"(\d+) (\d+)", path):
        across, down = float(x) - 44, float(y) - 14
        assert left < 44 + across * math.cos(angle) - down * math.sin(angle) < right
        assert top < 14 + across * math.sin(angle) + down * math.cos(angle) < bottom


@pytest.mark.parametrize(
    ("source", "printed"),
    [
        ("arithmetic", ""),
        ("arithmetic: half k d^2 a bond", "half k d^2 a bond"),
        ("zero-point energies, 3 to 30 kcal/mol: from memory", ""),
        (
            "atoms: NIST; small molecules: from memory; else the lowest spin",
            "atoms: NIST; else the lowest spin",
        ),
        ("common practice, no source", "common practice"),
        ("Lee and Taylor (1989)", "Lee and Taylor (1989)"),
    ],
)
def test_a_source_that_nobody_can_look_up_is_not_printed(source, printed):
    assert words.source(source) == printed


def test_no_source_of_the_program_is_printed_as_a_note_to_itself():
    rules = [rule.source for rule in RULES]
    limits = [limit.source for limit in THRESHOLDS.values()]
    for source in (*rules, *limits):
        printed = words.source(source)
        assert "from memory" not in printed
        assert "arithmetic" not in printed
        assert "no source" not in printed


def test_a_reading_that_is_true_or_false_is_said_as_a_statement():
    assert words.said("stable_external", True) == "a minimum"
    assert words.said("stable_external", False).startswith("not a minimum: an unrestricted solution lies")
    assert words.said("stable", "no") == "not a minimum"
    assert words.said("T1", 0.0312) == "0.0312"


def test_a_remedy_is_said_on_paper_as_what_can_be_done():
    button = Remedy(label="Use cc-pVTZ and run", edits=(), then_run=True)
    assert words.remedy(button) == "Use cc-pVTZ, and compute again."
    assert words.remedy(Remedy(label="Freeze the core")) == "Freeze the core."


def test_what_happened_on_the_way_is_said_with_the_calculation_it_happened_in(record):
    task, result = next(iter(record.results.items()))
    told = result.model_copy(update={"notes": ("carried on from iteration 3",)})
    text = plain(page_of(replace(record, results={**record.results, task: told})))
    assert (
        f"In the course of its calculations: {result.rung}/{result.basis}: carried on from iteration 3"
        in text
    )
