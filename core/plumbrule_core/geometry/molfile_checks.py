"""The lines of a molfile record checked one by one, so that a fault can be named by its line."""

from collections.abc import Iterator, Sequence

from plumbrule_core.elements import ELEMENTS
from plumbrule_core.geometry.draft import HEAVY_HYDROGEN, Faulty, check_size, coordinate, symbol_of

COUNTS_LINE = 3
"""The counts line stands fourth."""
V30 = "M  V30 "


def labels_of(lines: Sequence[str], start: int, faults: Faulty) -> list[str]:
    """The atom labels of a record whose first line has number `start`; what is wrong goes to `faults`."""
    counts = lines[COUNTS_LINE].rstrip() if len(lines) > COUNTS_LINE else ""
    if counts.endswith("V2000"):
        return _labels_v2000(lines, start, faults)
    if counts.endswith("V3000"):
        return _labels_v3000(lines, start, faults)
    faults.add(start + COUNTS_LINE, "should be the counts line, which ends in V2000 or V3000")
    return []


def _labels_v2000(lines: Sequence[str], start: int, faults: Faulty) -> list[str]:
    try:
        atoms, bonds = (_count(lines[COUNTS_LINE][at : at + 3]) for at in (0, 3))
    except ValueError as error:
        faults.add(start + COUNTS_LINE, f"should begin with the numbers of atoms and bonds: {error}")
        return []
    check_size(atoms)
    first = COUNTS_LINE + 1
    if atoms == 0:
        faults.add(start + COUNTS_LINE, "announces no atoms")
    if len(lines) < first + atoms + bonds:
        faults.add(
            start + COUNTS_LINE,
            f"announces {atoms} atoms and {bonds} bonds, but {len(lines) - first} lines follow",
        )
        return []
    rows = lines[first : first + atoms]
    places = [[row[column : column + 10].strip() for column in (0, 10, 20)] for row in rows]
    labels = [
        _checked(row[31:34].strip(), place, start + first + at, faults)
        for at, (row, place) in enumerate(zip(rows, places, strict=True))
    ]
    for at in range(first + atoms, first + atoms + bonds):
        ends = [lines[at][column : column + 3].strip() for column in (0, 3)]
        _check_bond(ends, places, start + at, faults)
    return labels


def _labels_v3000(lines: Sequence[str], start: int, faults: Faulty) -> list[str]:
    rows = list(_v30_rows(lines))
    labels: list[str] = []
    block = ""
    for at, row in rows:
        fields = row.split()
        if fields[:1] == ["BEGIN"] and len(fields) > 1:
            block = fields[1]
        elif fields[:1] == ["END"]:
            block = ""
        elif block == "ATOM":
            labels.append(_checked(fields[1] if len(fields) > 1 else "", fields[2:5], start + at, faults))
    check_size(len(labels))
    if not labels and not faults.said:
        faults.add(start + COUNTS_LINE, "announces V3000, but no atom block follows")
    return labels


def _v30_rows(lines: Sequence[str]) -> Iterator[tuple[int, str]]:
    """The rows of a V3000 record with the place of their first line; '-' at the end goes on in the next."""
    held, place = "", 0
    for at, line in enumerate(lines):
        if not line.startswith(V30):
            continue
        place = place if held else at
        text = line[len(V30) :].rstrip()
        if text.endswith("-"):
            held += text[:-1]
            continue
        yield place, held + text
        held = ""


def _count(text: str) -> int:
    if not (text.strip().isascii() and text.strip().isdigit()):
        raise ValueError(f"'{text}' is not a number")
    return int(text)


def _checked(label: str, position: Sequence[str], line: int, faults: Faulty) -> str:
    try:
        if len(position) < 3:
            raise ValueError("an atom needs three coordinates and a symbol")
        for text in position:
            coordinate(text)
        symbol = symbol_of(label) if not label.isdigit() else ""
        if label not in ELEMENTS and label not in HEAVY_HYDROGEN:
            raise ValueError(
                f"'{label[:20]}' is not how an element is written here" + (f"; {symbol} is" * bool(symbol))
            )
    except ValueError as error:
        faults.add(line, str(error))
    return label


def _check_bond(ends: Sequence[str], places: Sequence[Sequence[str]], line: int, faults: Faulty) -> None:
    try:
        first, second = (_count(text) for text in ends)
    except ValueError as error:
        faults.add(line, f"a bond names two atoms by number: {error}")
        return
    atoms = len(places)
    if not (1 <= first <= atoms and 1 <= second <= atoms and first != second):
        faults.add(line, f"a bond of atoms {first} and {second} cannot be; atoms are numbered 1 to {atoms}")
    elif places[first - 1] == places[second - 1]:
        faults.add(line, f"a bond of atoms {first} and {second} cannot be; they stand in one place")
