"""The drawings of the report as SVG: plain lines, boxes and words, so that every viewer shows them."""

import math
from collections.abc import Iterator, Sequence
from html import escape

from plumbrule_core.documents.findings import BudgetLine, Compared, Level
from plumbrule_core.exports import words
from plumbrule_core.judgement.wording import bar

INK, FAINT, ACCENT, BAND = "#22282e", "#8a949e", "#1f5f8b", "#dfe9f0"
WIDTH, ROW, LEFT, RIGHT, FOOT = 640, 30, 130, 110, 44
LEANS: dict[Level, tuple[int, str]] = {
    "unknown": (0, "#8a949e"),
    "sound": (0, "#2a7048"),
    "take care": (17, "#96590a"),
    "do not rely on it": (64, "#b3261e"),
}
"""How far the cord of the plumb line leans in degrees, and its colour."""


def plumb_line(level: Level) -> str:
    """A cord with its bob before a board: straight for sound, leaning for care, lying over for the worst."""
    lean, colour = LEANS[level]
    dashed = ' stroke-dasharray="3 3"' if level == "unknown" else ""
    true = f'<line x1="44" y1="14" x2="44" y2="120" stroke="{FAINT}" stroke-dasharray="2 4"/>'
    return _svg(
        150,
        132,
        f"Plumb line: {words.LEVEL_WORDS[level]}",
        [
            f'<rect x="4" y="4" width="142" height="124" fill="none" stroke="{FAINT}" stroke-width="1"/>',
            true if lean else "",
            f'<g transform="rotate({-lean} 44 14)">'
            f'<line x1="44" y1="14" x2="44" y2="92" stroke="{colour}" stroke-width="2"{dashed}/>'
            f'<path d="M44 90 L53 101 L44 119 L35 101 Z" fill="{colour}"/></g>',
            f'<circle cx="44" cy="14" r="3" fill="{INK}"/>',
        ],
    )


def comparison(lines: Sequence[Compared], unit: str, within: float) -> str:
    """Every rung's answer as a point with its bar; the band is the accuracy asked for around the answer."""
    lows = [line.value - (line.uncertainty or 0) for line in lines]
    highs = [line.value + (line.uncertainty or 0) for line in lines]
    best = next((line.value for line in lines if line.from_best == 0), lines[-1].value)
    scale = _Scale(min([*lows, best - within]), max([*highs, best + within]))
    foot = 16 + ROW * len(lines)
    body = [
        f'<rect x="{scale(best - within):.1f}" y="10" height="{foot - 10}" fill="{BAND}" '
        f'width="{scale(best + within) - scale(best - within):.1f}"/>',
        *_axis(scale, foot, unit),
    ]
    for place, line in enumerate(lines):
        body.extend(_point(line, scale, 16 + ROW * place + ROW / 2, unit))
    return _svg(WIDTH, foot + FOOT, "The answer rung by rung", body)


def _point(line: Compared, scale: "_Scale", y: float, unit: str) -> Iterator[str]:
    x = scale(line.value)
    colour = FAINT if line.stopped else ACCENT
    yield _label(LEFT - 12, y + 4, line.rung, "end")
    if line.uncertainty:
        low, high = scale(line.value - line.uncertainty), scale(line.value + line.uncertainty)
        yield f'<line x1="{low:.1f}" y1="{y}" x2="{high:.1f}" y2="{y}" stroke="{colour}" stroke-width="2"/>'
        for end in (low, high):
            place = f'x1="{end:.1f}" y1="{y - 5}" x2="{end:.1f}" y2="{y + 5}"'
            yield f'<line {place} stroke="{colour}" stroke-width="2"/>'
    fill = "#ffffff" if line.stopped else colour
    yield f'<circle cx="{x:.1f}" cy="{y}" r="5" fill="{fill}" stroke="{colour}" stroke-width="2"/>'
    yield _label(WIDTH - RIGHT + 14, y + 4, words.energy(line.value, unit), "start")


def budget(lines: Sequence[BudgetLine], unit: str) -> str:
    """Every cause of uncertainty as a bar."""
    scale = _Scale(0.0, max(line.size for line in lines), LEFT + 60)
    body = []
    for place, line in enumerate(lines):
        y = 10 + ROW * place
        body.append(_label(LEFT + 48, y + ROW / 2 + 4, line.cause, "end"))
        body.append(
            f'<rect x="{LEFT + 60}" y="{y + 7}" width="{max(scale(line.size) - LEFT - 60, 1):.1f}" '
            f'height="{ROW - 14}" fill="{ACCENT}"/>'
        )
        body.append(_label(WIDTH - RIGHT + 14, y + ROW / 2 + 4, f"{bar(line.size)} {unit}", "start"))
    return _svg(WIDTH, 20 + ROW * len(lines), "The uncertainty by its causes", body)


class _Scale:
    """Values to places on the page; a little air at both ends."""

    def __init__(self, low: float, high: float, left: float = LEFT) -> None:
        air = (high - low or 1.0) * (0.04 if left == LEFT else 0.0)
        self.low, self.high, self.left = low - air, high + air or 1.0, left

    def __call__(self, value: float) -> float:
        share = (value - self.low) / (self.high - self.low or 1.0)
        return self.left + share * (WIDTH - RIGHT - self.left)


def _axis(scale: _Scale, y: float, unit: str) -> Iterator[str]:
    yield f'<line x1="{LEFT}" y1="{y}" x2="{WIDTH - RIGHT}" y2="{y}" stroke="{INK}" stroke-width="1"/>'
    for value in ticks(scale.low, scale.high):
        x = scale(value)
        yield f'<line x1="{x:.1f}" y1="{y}" x2="{x:.1f}" y2="{y + 5}" stroke="{INK}" stroke-width="1"/>'
        yield _label(x, y + 18, words.minus(f"{value:g}"), "middle")
    yield _label((LEFT + WIDTH - RIGHT) / 2, y + 36, unit, "middle")


def ticks(low: float, high: float, about: int = 7) -> tuple[float, ...]:
    """Round values between two ends, about so many, in steps of 1, 2 or 5."""
    if not high > low:
        return (low,)
    raw = (high - low) / about
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(f * power for f in (1, 2, 5, 10) if f * power >= raw)
    first, last = math.ceil(low / step), math.floor(high / step)
    return tuple(round(number * step, 12) for number in range(first, last + 1))


def _label(x: float, y: float, text: str, anchor: str) -> str:
    return (
        f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}" font-family="sans-serif" font-size="13" '
        f'fill="{INK}">{escape(text)}</text>'
    )


def _svg(width: int, height: float, title: str, body: Sequence[str]) -> str:
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}" height="{height:.0f}" '
        f'viewBox="0 0 {width} {height:.0f}" role="img"><title>{escape(title)}</title>{"".join(body)}</svg>'
    )
