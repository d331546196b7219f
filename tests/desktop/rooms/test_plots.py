from pathlib import Path
from types import SimpleNamespace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QImage
from PySide6.QtSvg import QSvgRenderer
from PySide6.QtWidgets import QApplication, QPushButton, QWidget

from plumbrule_desktop import look
from plumbrule_desktop.plots.budget import BudgetPlot
from plumbrule_desktop.plots.comparison import ComparisonPlot
from plumbrule_desktop.plots.convergence import ConvergencePlot
from plumbrule_desktop.plots.pace import Pace
from plumbrule_desktop.plots.panel import PlotPanel
from plumbrule_desktop.plots.series import budget, comparison, convergence


def _count(image: QImage, colour: str, tolerance: int = 12) -> int:
    wanted = QColor(colour)
    near = 0
    for y in range(0, image.height()):
        for x in range(0, image.width()):
            seen = image.pixelColor(x, y)
            near += (
                abs(seen.red() - wanted.red()) < tolerance
                and abs(seen.green() - wanted.green()) < tolerance
                and abs(seen.blue() - wanted.blue()) < tolerance
            )
    return near


@pytest.fixture
def dressed(qapp: QApplication):
    look.wear(qapp, "light")
    yield qapp
    look.wear(qapp, "light")


def test_the_comparison_is_spoken_and_stepped_through_with_the_keyboard(
    qtbot, dressed, made: SimpleNamespace
):
    plot = ComparisonPlot()
    qtbot.addWidget(plot)
    plot.show_data(comparison(made.judged(), "kJ/mol", 4.0))
    assert plot.accessibleName() == "Comparison of the rungs"
    assert "CCSD(T)/cc-pVTZ (the answer stands on this): 937 \u00b1 12 kJ/mol" in plot.accessibleDescription()
    said: list[str] = []
    plot.detail.connect(said.append)
    plot.show()
    qtbot.keyClick(plot, Qt.Key.Key_End)
    qtbot.keyClick(plot, Qt.Key.Key_Up)
    assert said[0].startswith("CCSD(T)/cc-pVTZ: 937 \u00b1 12 kJ/mol")
    assert said[1].startswith("CCSD/cc-pVTZ: 898 \u00b1 20 kJ/mol, \u221238.5 kJ/mol from the best rung")


def test_a_far_outlier_does_not_squeeze_the_other_rungs(qtbot, dressed, made: SimpleNamespace):
    plot = ComparisonPlot()
    qtbot.addWidget(plot)
    plot.show_data(comparison(made.judged(), "kJ/mol", 4.0))
    low, high = plot.span()
    assert low > -100
    assert low < -38.5 - 20.0
    assert high > 25.2 + 35.0


def test_a_single_rung_without_any_bar_can_be_drawn(qtbot, dressed, made: SimpleNamespace):
    judgement = made.judged()
    alone = judgement.model_copy(
        update={"comparison": (judgement.comparison[-1].model_copy(update={"uncertainty": None}),)}
    )
    plot = ComparisonPlot()
    qtbot.addWidget(plot)
    plot.show_data(comparison(alone, "kJ/mol", None))
    plot.resize(500, 120)
    low, high = plot.span()
    assert low < 0 < high
    assert not plot.grab().isNull()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_colours_of_a_plot_come_from_the_scheme(qtbot, dressed, made: SimpleNamespace, scheme: str):
    look.wear(dressed, scheme)
    c = look.LIGHT if scheme == "light" else look.DARK
    plot = BudgetPlot()
    qtbot.addWidget(plot)
    plot.show_data(budget(made.judged(), "kJ/mol"))
    plot.resize(500, 260)
    picture = plot.grab().toImage()
    assert _count(picture, c.accent) > 1000
    assert _count(picture, c.surface) > 20000


def test_the_budget_says_how_and_from_where_for_each_cause(qtbot, dressed, made: SimpleNamespace):
    plot = BudgetPlot()
    qtbot.addWidget(plot)
    plot.show_data(budget(made.judged(), "kJ/mol"))
    words = plot.row_words(0)
    assert words.startswith("basis set: 12.2 kJ/mol, known shift +9.8 kJ/mol. twice the rms error")
    assert "Source: 44 atomisation energies to the 6Z limit." in words


def test_the_convergence_is_spoken_and_read_off_iteration_by_iteration(qtbot, dressed, made: SimpleNamespace):
    plot = ConvergencePlot()
    qtbot.addWidget(plot)
    plot.show_data(convergence(made.trace(7), made.SETTINGS, "CCSD"))
    assert plot.accessibleDescription().startswith("7 iterations, last energy -109.76999")
    assert "goal 1e-08" in plot.accessibleDescription()
    plot.show()
    said: list[str] = []
    plot.detail.connect(said.append)
    qtbot.keyClick(plot, Qt.Key.Key_End)
    assert said[-1].startswith("Iteration 7: -109.76999")
    assert "hartree, residual" in said[-1]
    qtbot.keyClick(plot, Qt.Key.Key_Escape)
    assert said[-1] == ""


def test_the_convergence_plot_draws_its_curves(qtbot, dressed, made: SimpleNamespace):
    plot = ConvergencePlot()
    qtbot.addWidget(plot)
    plot.resize(500, 320)
    with qtbot.waitExposed(plot):
        plot.show()
    plot.show_data(convergence(made.trace(12), made.SETTINGS, "CCSD"))
    qtbot.waitUntil(lambda: _count(plot.grab().toImage(), look.LIGHT.accent, 40) > 100)


def test_hundreds_of_changes_are_drawn_at_a_calm_pace_and_none_while_hidden(qtbot, dressed):
    widget = QWidget()
    qtbot.addWidget(widget)
    drawn: list[int] = []
    pace = Pace(widget, lambda: drawn.append(1))
    for _ in range(50):
        pace.ask()
    assert drawn == []
    with qtbot.waitExposed(widget):
        widget.show()
    qtbot.waitUntil(lambda: len(drawn) == 1)
    for _ in range(200):
        pace.ask()
    assert len(drawn) == 1
    qtbot.waitUntil(lambda: len(drawn) == 2)
    widget.hide()
    pace.ask()
    assert len(drawn) == 2


def _panel(qtbot, made: SimpleNamespace) -> PlotPanel:
    plot = ComparisonPlot()
    plot.show_data(comparison(made.judged(), "kJ/mol", 4.0))
    panel = PlotPanel("The rungs beside each other", plot)
    qtbot.addWidget(panel)
    panel.resize(560, 320)
    panel.show()
    return panel


def test_a_plot_can_be_seen_as_a_table(qtbot, dressed, made: SimpleNamespace):
    panel = _panel(qtbot, made)
    toggle = next(button for button in panel.findChildren(QPushButton) if button.text() == "Numbers")
    qtbot.mouseClick(toggle, Qt.MouseButton.LeftButton)
    assert panel.table.isVisible()
    model = panel.table.model()
    assert [model.index(3, column).data() for column in range(3)] == ["CCSD(T)", "cc-pVTZ", "937 \u00b1 12"]
    qtbot.mouseClick(toggle, Qt.MouseButton.LeftButton)
    assert panel.plot.isVisible()


@pytest.mark.parametrize("kind", [ComparisonPlot, ConvergencePlot])
def test_a_plot_is_saved_as_a_drawing_of_vectors_and_as_a_picture(
    qtbot, dressed, made: SimpleNamespace, tmp_path: Path, kind: type[QWidget]
):
    plot = kind()
    if isinstance(plot, ComparisonPlot):
        plot.show_data(comparison(made.judged(), "kJ/mol", 4.0))
    else:
        plot.show_data(convergence(made.trace(), made.SETTINGS, "CCSD"))
    panel = PlotPanel("A plot", plot)
    qtbot.addWidget(panel)
    panel.resize(560, 320)
    with qtbot.waitExposed(panel):
        panel.show()
    panel.save(tmp_path / "plot.svg")
    panel.save(tmp_path / "plot.png")
    drawing = (tmp_path / "plot.svg").read_text()
    assert QSvgRenderer(str(tmp_path / "plot.svg")).isValid()
    assert drawing.count("<path") + drawing.count("<poly") > 10
    assert "<image" not in drawing
    assert not QImage(str(tmp_path / "plot.png")).isNull()


def test_a_picture_that_cannot_be_written_says_so(qtbot, dressed, made: SimpleNamespace, tmp_path: Path):
    panel = _panel(qtbot, made)
    panel.save(tmp_path / "no such folder" / "plot.png")
    assert "could not be written" in panel.detail_text
