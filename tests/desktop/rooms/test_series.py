import math
from types import SimpleNamespace

import pytest

from plumbrule_desktop.plots.series import budget, comparison, convergence
from plumbrule_desktop.plots.ticks import tick_text, ticks
from plumbrule_desktop.state.amounts import energy, plain, signed


def test_a_trace_becomes_the_logarithm_of_each_change_and_of_each_residual():
    curves = convergence(((1, -1.0, 1e-1), (2, -1.1, 1e-3), (3, -1.10001, None)))
    assert curves.change.x.tolist() == [2, 3]
    assert curves.change.y.tolist() == pytest.approx([-1.0, -5.0])
    assert curves.residual.x.tolist() == [1, 2]
    assert curves.residual.y.tolist() == pytest.approx([-1.0, -3.0])


def test_a_change_of_nothing_is_drawn_at_the_floor_and_is_no_error():
    curves = convergence(((1, -1.0, 0.0), (2, -1.0, 0.0)))
    assert curves.change.y.tolist() == pytest.approx([-14.0])


def test_iterations_are_counted_through_where_a_task_was_carried_on():
    curves = convergence(((1, -1.0, 0.1), (2, -1.1, 0.01), (2, -1.1001, 0.01), (3, -1.10011, 0.001)))
    assert curves.residual.x.tolist() == [1, 2, 3, 4]
    assert len(curves.numbers().rows) == 4


def test_the_goals_are_those_of_the_settings(made: SimpleNamespace):
    settings = made.SETTINGS
    assert convergence((), settings, "HF").change.goal == pytest.approx(math.log10(settings.scf_tolerance))
    assert convergence((), settings, "CCSD").residual.goal == pytest.approx(math.log10(settings.cc_residual))
    assert convergence((), settings, "MP2").change.goal is None


def test_a_curve_says_whether_it_reached_its_goal(made: SimpleNamespace):
    assert convergence(made.trace(14), made.SETTINGS, "CCSD").change.reached
    assert not convergence(made.trace(5), made.SETTINGS, "CCSD").change.reached


def test_an_empty_trace_says_so():
    assert convergence(()).says() == "No iteration yet."
    assert convergence(()).numbers().rows == ()


def test_the_rung_the_answer_stands_on_is_the_best_one(made: SimpleNamespace):
    points = comparison(made.judged(), "kJ/mol", 4.0).points
    assert [point.rung for point in points if point.best] == ["CCSD(T)"]
    assert points[-1].bar == pytest.approx(12.4)


def test_no_rung_has_a_bar_where_the_answer_is_not_to_be_relied_on(made: SimpleNamespace):
    shown = comparison(made.judged("do not rely on it"), "kJ/mol", 4.0)
    assert [point.bar for point in shown.points] == [None] * 4
    assert "CCSD(T)/cc-pVTZ (do not rely on it)" in shown.says()
    assert "\u00b1" not in shown.says()


def test_the_budget_stands_largest_first_with_its_shift_apart(made: SimpleNamespace):
    shown = budget(made.judged(), "kJ/mol")
    assert [line.cause for line in shown.lines] == ["basis set", "beyond CCSD(T)", "geometry"]
    row = shown.numbers().rows[0]
    assert row[:3] == ("basis set", "12.2 kJ/mol", "+9.8 kJ/mol")
    assert row[4] == "44 atomisation energies to the 6Z limit"
    assert "known shift +9.8 kJ/mol" in shown.says()


def test_numbers_can_be_pasted_into_a_sheet(made: SimpleNamespace):
    lines = budget(made.judged(), "kJ/mol").numbers().text().splitlines()
    assert lines[0].split("\t")[0] == "Cause"
    assert len(lines) == 4


@pytest.mark.parametrize(
    ("value", "unit", "bar", "text"),
    [
        (936.9, "kJ/mol", 6.3, "936.9 \u00b1 6.3 kJ/mol"),
        (-40.42, "kJ/mol", None, "\u221240.4 kJ/mol"),
        (-0.001, "kJ/mol", None, "0.0 kJ/mol"),
        (1234.4, "cm-1", None, "1234 cm\u207b\u00b9"),
    ],
)
def test_an_energy_carries_its_unit_and_a_true_minus(value: float, unit: str, bar: float | None, text: str):
    assert energy(value, unit, bar) == text


def test_a_distance_carries_its_sign_and_pasted_text_plain_signs():
    assert signed(3.1, "kJ/mol") == "+3.1 kJ/mol"
    assert signed(0.0, "kJ/mol") == "0.0 kJ/mol"
    assert plain(energy(-3.1, "cm-1", 2.0)) == "-3.1 +/- 2.0 cm-1"


def test_ticks_are_round_and_inside():
    assert ticks(0.0, 12.0, 6) == (0, 2, 4, 6, 8, 10, 12)
    assert all(-0.37 <= tick <= 0.41 for tick in ticks(-0.37, 0.41))
    assert tick_text(-0.0, 0.2) == "0.0"
    assert tick_text(-50.0, 50.0) == "\u221250"
    assert ticks(3.0, 3.0) == (3.0,)
