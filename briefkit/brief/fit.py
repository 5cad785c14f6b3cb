"""Whether the crew's two sheets come out as one A5 sheet each, without a browser to ask.

An estimate from the widths of Helvetica, which the page's fonts share, and the measures of handout.css in points. A
second sheet could be left behind in the crew room, so the author hears of it at the build; a browser test holds the
estimate against what Chromium prints.
"""

from __future__ import annotations

import math
from functools import cache
from typing import Final

from briefkit.brief.pages import CrewPage, Grid, Section

_MM: Final = 72.0 / 25.4
WIDTH: Final = (148.0 - 2 * 10.0) * _MM
HEIGHT: Final = (210.0 - 11.0 - 6.0) * _MM - 16.0
_LINE: Final = 11.0 * 1.2  # a sentence, a note beside a table
_HEADING: Final = 11.5 * 1.2
_CELL: Final = 14.0 * 1.12 + 3.0 + 0.75  # line, padding, hairline
_HEAD_CELL: Final = 11.0 * 1.22 + 3.0 + 0.75
_COLUMN_GAP: Final = 13.2
_BESIDE: Final = 132.0  # notes narrower than this go below the table
_BLOCK_GAP: Final = (4.0, 14.0)
# Sheet 2: a sentence, a heading, a line of its table, what a row has beside its lines, and the columns' widths.
_LINE_2: Final = 11.0 * 1.16
_HEADING_2: Final = 11.5 * 1.3
_CELL_LINE_2: Final = 11.0 * 1.12
_CELL_2: Final = 2.2 + 0.75
_COLUMNS_2: Final = (0.17 * WIDTH, 0.23 * WIDTH - 5.0, 0.27 * WIDTH - 5.0, 0.33 * WIDTH - 5.0)

# Adobe Core 14 AFM files (1999), Helvetica and Helvetica-Bold: thousandths of the type size; the rest are 556.
_REGULAR: Final = {
    191: "'", 222: "ijl’‘", 260: "|", 278: " !,./:;I[\\]ft·\u00a0", 333: "()-`r“”²³", 334: "{}", 355: '"', 389: "*",
    400: "°", 469: "^", 500: "Jcksvxyz", 549: "±", 584: "+<=>~−×", 611: "FTZ", 667: "&ABEKPSVXY", 722: "CDHNRUw",
    778: "GOQ", 833: "Mm", 834: "½", 889: "%", 944: "W", 1000: "…", 1015: "@",
}  # fmt: skip
_BOLD: Final = {
    238: "'", 278: " ,./I\\ijl’‘·\u00a0", 280: "|", 333: "!()-:;[]`ft²³", 389: "*r{}", 400: "°", 474: '"', 500: "z“”",
    549: "±", 584: "+<=>^~−×", 611: "?FLTZbdghnopqu", 667: "EPSVXY", 722: "&ABCDHKNRU", 778: "GOQw", 833: "M",
    834: "½", 889: "%m", 944: "W", 975: "@", 1000: "…",
}  # fmt: skip


def complaint(page: CrewPage) -> str:
    """A sentence for the author where sheet 1 or sheet 2 would not be one A5 sheet; else empty."""
    sheets = (("sheet 1", height(page), "fewer masses or words"), ("sheet 2", recognition_height(page), "fewer words"))
    return "; ".join(
        f"{name} is about {_lines_over(tall)} longer than one A5 sheet: {remedy}"
        for name, tall, remedy in sheets
        if tall > HEIGHT
    )


def _lines_over(tall: float) -> str:
    lines = math.ceil((tall - HEIGHT) / _LINE)
    return f"{lines} {'line' if lines == 1 else 'lines'}"


def height(page: CrewPage) -> float:
    """The height sheet 1 takes on A5, in points; good to about a line."""
    beside = text_width(page.unit, 14.0, bold=True) + 14.0 if page.unit else 0.0
    head = _lines(page.heading, 14.0, WIDTH - beside, bold=True) * 14.0 * 1.2 + 1.0
    head += sum(_lines(line, 11.0) for line in page.under) * _LINE
    return head + sum(5.0 + _section(part) for part in page.front)


def recognition_height(page: CrewPage) -> float:
    """The height sheet 2 takes on A5, in points; good to about a line; 0 where there is none."""
    return sum(4.0 + _recognition(part) for part in page.recognition) - (4.0 if page.recognition else 0.0)


def _recognition(part: Section) -> float:
    if part.run_in:
        first, *more = (*part.before, *part.after)
        used = text_width(f"{part.heading}:", 11.5, bold=True)
        lines = _lines(first, 11.0, used=used) + sum(_lines(text, 11.0) for text in more)
        return lines * _LINE_2 + len(more) + _HEADING_2 - _LINE_2
    rows = part.grid.rows if part.grid is not None else ()
    table = sum(
        max(_lines(cell, 11.0, wide) for cell, wide in zip(row, _COLUMNS_2, strict=False)) * _CELL_LINE_2 + _CELL_2
        for row in rows
    )
    table += _CELL_LINE_2 + _CELL_2 + 2.0 * 5.4 if rows else 0.0
    points = sum(_lines(point, 11.0, WIDTH - 9.0) for point in part.points) * _LINE_2 + (2.0 if part.points else 0.0)
    sentences = sum(1.0 + _lines(text, 11.0) * _LINE_2 for text in (*part.before, *part.after))
    return _HEADING_2 + table + points + sentences


def text_width(text: str, size: float, *, bold: bool = False) -> float:
    """The width of a line of text, in points."""
    table = _widths(bold)
    return sum(table.get(letter, 556) for letter in text) * size / 1000.0


@cache
def _widths(bold: bool) -> dict[str, int]:
    return {letter: width for width, letters in (_BOLD if bold else _REGULAR).items() for letter in letters}


def _lines(text: str, size: float, width: float = WIDTH, *, bold: bool = False, used: float = 0.0) -> int:
    """Lines of greedily broken text; `used` is what stands on the first line already."""
    lines, at, space = 1, used, text_width(" ", size, bold=bold)
    for word in text.split(" "):
        wide = text_width(word, size, bold=bold)
        if at > 0.0 and at + space + wide > width:
            lines, at = lines + 1, wide
        else:
            at += wide + (space if at > 0.0 else 0.0)
    return lines


def _section(part: Section) -> float:
    sentences = (*part.before, *part.points, *part.after)
    if part.run_in and sentences:
        first = _lines(sentences[0], 11.0, used=text_width(f"{part.heading}:", 11.5, bold=True))
        return first * _LINE + (_HEADING - _LINE) + sum(1.0 + _lines(text, 11.0) * _LINE for text in sentences[1:])
    title = _lines(part.heading, 11.5, bold=True) * _HEADING
    if part.aside and text_width(part.heading, 11.5, bold=True) + 18.0 + text_width(part.aside, 11.0) > WIDTH:
        title += _LINE
    block = 4.0 + _grid(part.grid) if part.grid is not None else 0.0
    return title + block + sum(1.0 + _lines(text, 11.0) * _LINE for text in sentences)


def _grid(grid: Grid) -> float:
    columns = list(zip(grid.header, *grid.rows, strict=True))
    widths = [
        max(text_width(cells[0], 11.0), *(text_width(cell, 14.0, bold=at > 0) for cell in cells[1:]))
        for at, cells in enumerate(columns)
    ]
    if grid.numbers:  # a column of figures has a least width, its gap included
        widths = [widths[0], *(max(width, 3.6 * 14.0 - _COLUMN_GAP) for width in widths[1:])]
    wide = sum(widths) + _COLUMN_GAP * (len(widths) - 1)
    room = WIDTH - sum(widths[:-1]) - _COLUMN_GAP * (len(widths) - 1)  # what the last column may take
    table = _HEAD_CELL + sum(
        (_lines(row[-1], 14.0, room, bold=True) - 1) * 14.0 * 1.12 + _CELL if wide > WIDTH else _CELL
        for row in grid.rows
    )
    if not grid.beside:
        return table
    beside = WIDTH - wide - _BLOCK_GAP[1]
    at_the_side = beside >= _BESIDE
    notes = sum(_lines(note, 11.0, beside if at_the_side else WIDTH) * _LINE + 1.0 for note in grid.beside) + 1.0
    return max(table, notes) if at_the_side else table + _BLOCK_GAP[0] + notes
