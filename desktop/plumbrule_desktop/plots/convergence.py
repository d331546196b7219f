"""How a task converges, live: the change of energy and the residual, each on a logarithmic scale."""

import math
from typing import Any

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import QEvent, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFont, QKeyEvent
from PySide6.QtWidgets import QWidget

from plumbrule_desktop.look import colours
from plumbrule_desktop.plots.pace import Pace
from plumbrule_desktop.plots.series import Convergence, Curve, Numbers, convergence

RAISED = str.maketrans("-0123456789", "\u207b\u2070\u00b9\u00b2\u00b3\u2074\u2075\u2076\u2077\u2078\u2079")
FIRST_WIDTH = 10
"""The scale shows so many iterations before it is first widened."""


class PowerAxis(pg.AxisItem):
    """An axis of decimal logarithms, labelled as powers of ten."""

    def tickSpacing(self, low: float, high: float, size: float) -> list[tuple[float, float]]:
        """Whole powers, no more than the height has room for."""
        room = max(1, int(size // 26))
        return [(max(1.0, math.ceil((high - low) / room)), 0.0)]

    def tickStrings(self, values: list[float], scale: float, spacing: float) -> list[str]:
        """`10⁻⁶`."""
        return ["10" + f"{value:.0f}".translate(RAISED) for value in values]


class _Track:
    """One curve with its goal, in one plot of the two."""

    def __init__(self, layout: pg.GraphicsLayoutWidget, row: int, symbol: str, title: str) -> None:
        self._title = title
        self.plot = layout.addPlot(row=row, col=0, axisItems={"left": PowerAxis("left")}, enableMenu=False)
        self.plot.setMouseEnabled(False, False)
        self.plot.hideButtons()
        self.plot.disableAutoRange()
        self.plot.showGrid(x=False, y=True, alpha=0.25)
        self.plot.getAxis("left").setWidth(52)
        self.curve = self.plot.plot(symbol=symbol, symbolSize=6, antialias=True)
        self.curve.opts["useCache"] = False  # else a saved drawing holds its points as pixels
        self.goal = pg.InfiniteLine(angle=0)
        self.cursor = pg.InfiniteLine(angle=90)
        for line in (self.goal, self.cursor):
            line.setVisible(False)
            self.plot.addItem(line)

    def wear(self, widget: QWidget, colour: str) -> None:
        """The colours of the palette."""
        c = colours(widget)
        for side in ("left", "bottom"):
            axis = self.plot.getAxis(side)
            axis.setPen(pg.mkPen(c.line))
            axis.setTextPen(pg.mkPen(c.muted))
            axis.setTickFont(_small(widget.font()))
        self.plot.setTitle(self._title, color=c.text, size="9pt", justify="left")
        self.curve.setPen(pg.mkPen(colour, width=2))
        self.curve.setSymbolPen(pg.mkPen(colour))
        self.curve.setSymbolBrush(pg.mkBrush(c.surface))
        self.goal.setPen(pg.mkPen(c.sound, width=1.5, style=Qt.PenStyle.DashLine))
        self.cursor.setPen(pg.mkPen(c.muted, width=1))

    def show(self, curve: Curve, iterations: int) -> None:
        """New data; the scale is widened in steps, never at every point."""
        self.curve.setData(curve.x, curve.y)
        self.goal.setVisible(curve.goal is not None)
        if curve.goal is not None:
            self.goal.setValue(curve.goal)
        low, high = _decades(curve)
        self.plot.setYRange(low, high, padding=0)
        self.plot.setXRange(0, _wide(iterations), padding=0.01)


class ConvergencePlot(pg.GraphicsLayoutWidget):
    """Left and Right step through the iterations; `detail` says the numbers of the one stepped to."""

    detail = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Convergence of the chosen task")
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMinimumHeight(215)
        self.setFrameStyle(0)
        self.setCacheMode(self.CacheModeFlag.CacheNone)  # else a saved drawing holds its ground as pixels
        self._data = convergence(())
        self._at = 0
        self._tracks = (
            _Track(self, 0, "o", "Change of energy, hartree"),
            _Track(self, 1, "t", "Residual norm"),
        )
        self._tracks[0].plot.getAxis("bottom").setStyle(showValues=False)
        self._tracks[1].plot.setLabel("bottom", "Iteration")
        self._pace = Pace(self, self._redraw)
        self._wear()
        self.show_data(self._data)

    def sizeHint(self) -> QSize:
        """No more than it needs: the page decides how much room there is."""
        return QSize(400, 215)

    def show_data(self, data: Convergence) -> None:
        """Show this trace."""
        self._data = data
        self._at = min(self._at, len(data.energies))
        self.setAccessibleDescription(data.says())
        self._pace.ask()

    def numbers(self) -> Numbers:
        """The picture as a table."""
        return self._data.numbers()

    def says(self) -> str:
        """The picture in words."""
        return self._data.says()

    def step_to(self, iteration: int) -> None:
        """Mark an iteration, 0 for none."""
        self._at = max(0, min(iteration, len(self._data.energies)))
        for track in self._tracks:
            track.cursor.setVisible(self._at > 0)
            track.cursor.setValue(self._at)
        self.detail.emit(self._words() if self._at else "")

    def _words(self) -> str:
        row = self._data.numbers().rows[self._at - 1]
        change = f", change {row[2]} hartree" if row[2] else ""
        residual = f", residual {row[3]}" if row[3] else ""
        return f"Iteration {row[0]}: {row[1]} hartree{change}{residual}"

    def _redraw(self) -> None:
        count = len(self._data.energies)
        has_residual = bool(len(self._data.residual.y))
        self._tracks[0].show(self._data.change, count)
        self._tracks[1].show(self._data.residual, count)
        self._tracks[1].plot.setVisible(has_residual)
        self._tracks[0].plot.getAxis("bottom").setStyle(showValues=not has_residual)

    def _wear(self) -> None:
        c = colours(self)
        self.setBackground(QColor(c.surface))
        self._tracks[0].wear(self, c.accent)
        self._tracks[1].wear(self, c.care)

    def changeEvent(self, event: QEvent) -> None:
        """Follow the palette."""
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "_tracks"):
            self._wear()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Step through the iterations."""
        steps: dict[Any, int] = {
            Qt.Key.Key_Left: self._at - 1,
            Qt.Key.Key_Right: self._at + 1,
            Qt.Key.Key_Home: 1,
            Qt.Key.Key_End: len(self._data.energies),
            Qt.Key.Key_Escape: 0,
        }
        if event.key() in steps and self._data.energies:
            least = 0 if event.key() == Qt.Key.Key_Escape else 1
            self.step_to(max(least, steps[event.key()]))
            return
        super().keyPressEvent(event)


def _decades(curve: Curve) -> tuple[float, float]:
    values = [*(() if not len(curve.y) else (float(np.min(curve.y)), float(np.max(curve.y))))]
    values += [curve.goal] if curve.goal is not None else []
    if not values:
        return -8.0, 0.0
    low, high = math.floor(min(values)), math.ceil(max(values))
    return low - 0.5, max(high, low + 1) + 0.3


def _wide(iterations: int) -> int:
    return max(FIRST_WIDTH, math.ceil(iterations / 10) * 10)


def _small(font: QFont) -> QFont:
    small = QFont()
    if font.pointSize() > 0:
        small.setPointSize(max(7, font.pointSize() - 1))
    return small
