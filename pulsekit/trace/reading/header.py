"""Names, units and preamble: the lines above the first row."""

from __future__ import annotations

import re
from collections.abc import Sequence

from .grammar import BLANK, NUMBER, TEXT, classify, is_comment, plain
from .layout import Layout, split_line
from .told import Notes, clean
from .unit_words import NO_UNIT, read_unit, split_header

__all__ = ["read_header", "read_preamble"]

_KEY = re.compile(r"^(?P<key>[^:=]{1,60}?)\s*(?::(?!\d\d)|=)\s*(?P<value>.*)$")
_WIDE_GAPS = re.compile(r"\s{2,}|\t")
_WORD_WITH_UNIT = re.compile(r"[^\s(\[]+(?:\s*[(\[][^)\]]*[)\]])?")


def _bare(line: str) -> str:
    """Strip the sign of a comment."""
    return re.sub(r"^\s*(?:#+|%+|//+|!+|\*+|;;+)\s*", "", line).strip() if is_comment(line) else line.strip("\r\n")


def _cells(line: str, delimiter: str) -> list[str]:
    cells = [plain(cell) for cell in split_line(_bare(line), delimiter)]
    while cells and not cells[-1]:
        cells.pop()
    return cells


def _used_width(layout: Layout) -> int:
    width = layout.width
    while width > 1 and layout.kinds[width - 1] == BLANK:
        width -= 1
    return width


def _is_key(cells: Sequence[str]) -> bool:
    """'Note: by hand, run 3' is a line of the preamble, 'time: s, flow: mL/min' is none."""
    match = _KEY.match(cells[0]) if cells and ":" in cells[0] else None
    return match is not None and not read_unit(match["value"]).dimension


def _as_header(line: str, layout: Layout) -> list[str] | None:
    """Cells of a line if it can name the columns."""
    least, most = _used_width(layout), layout.width
    # A header may name an empty column at the end, or leave the first (an index) without a name.
    cells = _cells(line, layout.delimiter)
    if _is_key(cells):
        return None
    if least <= len(cells) <= most and _texts(cells):
        return cells
    if layout.delimiter in ("", " "):
        for pattern in (_WIDE_GAPS.split, _WORD_WITH_UNIT.findall):
            cells = [cell.strip() for cell in pattern(_bare(line).strip()) if cell.strip()]
            if len(cells) == least and _texts(cells):
                return cells
        if layout.delimiter == "" and not _KEY.match(_bare(line)):
            return [plain(_bare(line))] if _texts([_bare(line)]) else None
    return None


def _texts(cells: Sequence[str]) -> bool:
    kinds = [classify(cell) for cell in cells]
    return kinds.count(TEXT) >= max(1, 0.5 * sum(kind != BLANK for kind in kinds))


def _inside(cell: str) -> str:
    return re.sub(r"^[(\[{<]\s*|\s*[)\]}>]$", "", plain(cell)) if re.match(r"^[(\[{<].*[)\]}>]$", plain(cell)) else plain(cell)


def _is_unit_row(cells: Sequence[str], layout: Layout) -> bool:
    if not _used_width(layout) - 1 <= len(cells) <= layout.width or not any(cells):
        return False
    known = [cell for cell in cells if cell and (read_unit(_inside(cell)).dimension or re.match(r"^[(\[{].*[)\]}]$", cell))]
    none = [cell for cell in cells if _inside(cell).casefold() in NO_UNIT or re.search(r"(?i)hh?:mm", cell)]
    return bool(known) and len(known) + len([cell for cell in none if cell not in known]) >= len(cells)


def read_header(lines: Sequence[str], layout: Layout, notes: Notes) -> None:
    """Fill in names, units, headers and preamble of the layout."""
    above = [place for place in range(layout.first) if lines[place].strip()]
    used: set[int] = set()
    names: list[str] | None = None
    units: list[str] | None = None
    if above:
        place = above[-1]
        names = _as_header(lines[place], layout)
        cells = _cells(lines[place], layout.delimiter)
        if len(above) > 1 and _is_unit_row(cells, layout) and (upper := _as_header(lines[above[-2]], layout)):
            names, units = upper, cells
            used = {place, above[-2]}
            layout.header_cells = upper
        elif names is not None:
            used = {place}
            layout.header_cells = names
            if (
                len(above) > 1
                and len(cells) > 1
                and _is_unit_row(_cells(lines[above[-2]], layout.delimiter), layout)
                and not is_comment(lines[above[-2]])
            ):
                units = _cells(lines[above[-2]], layout.delimiter)
                used.add(above[-2])
        else:
            names = _other_header(lines, place, layout, notes)
            used = {place} if names else set()
            layout.header_cells = names
    layout.preamble = read_preamble([lines[place] for place in above if place not in used], layout.delimiter)
    _name_columns(layout, names, units, notes)


def _other_header(lines: Sequence[str], place: int, layout: Layout, notes: Notes) -> list[str] | None:
    """The line above the rows does not fit: another delimiter, a preamble line, or a refusal."""
    line = lines[place]
    least = _used_width(layout)
    for mark, shown in ((",", "commas"), (";", "semicolons"), ("\t", "tabs"), ("|", "bars")):
        cells = _cells(line, mark)
        if mark != layout.delimiter and len(cells) == least > 1 and _texts(cells) and not _is_key(cells):
            notes.add(f"The header in line {place + 1} is parted by {shown}, the rows are not: both were read so.")
            return cells
    cells = _cells(line, layout.delimiter)
    if len(cells) < 2 or is_comment(line) or _KEY.match(_bare(line)) or not _texts(cells) or layout.delimiter in (" ", ""):
        return None
    hint = (
        "; the commas may be both delimiter and decimal mark: export with another delimiter"
        if layout.delimiter == "," and layout.width == 2 * len(cells)
        else ""
    )
    raise notes.refuse(
        f"the header names {len(cells)} columns ({clean(', '.join(cells))}) but the rows have {least} cells{hint or '; mend the header, or pass delimiter='}",
        line=place + 1,
    )


def read_preamble(lines: Sequence[str], delimiter: str) -> dict[str, str]:
    """Lines 'key: value', 'key = value' or 'key;value' above the header, as text."""
    found: dict[str, str] = {}
    for line in lines:
        text = _bare(line).strip()
        cells = [plain(cell) for cell in split_line(text, delimiter)] if delimiter.strip() or delimiter == "\t" else [text]
        cells = [cell for cell in cells if cell]
        match = _KEY.match(plain(text)) if len(cells) < 2 or _KEY.match(cells[0]) else None
        if match:
            key, value = match["key"].strip(), match["value"].strip(' \t"' + (delimiter if delimiter.strip() else ""))
        elif len(cells) >= 2:
            key, value = cells[0].rstrip(":= "), " ".join(cells[1:])
        else:
            continue
        if key and len(found) < 500:
            found.setdefault(clean(key), clean(value, 200))
    return found


def _name_columns(layout: Layout, cells: list[str] | None, units: list[str] | None, notes: Notes) -> None:
    """Names and units of all columns; names are made distinct."""
    width = layout.width
    headers = (list(cells or []) + [""] * width)[:width]
    below = (list(units or []) + [""] * width)[:width]
    if cells is None:
        shown = ", ".join(f"column {place + 1}" for place in range(min(_used_width(layout), 4)))
        notes.add(f"There is no header: the columns are called {shown}{' and so on' if _used_width(layout) > 4 else ''}.")
    for place in range(width):
        header = clean(headers[place], 200)
        if units is not None and below[place]:
            name, unit, remark = header, _inside(below[place]), ""
        else:
            name, unit, remark = split_header(header) if cells is not None and header else (header, None, "")  # type: ignore[assignment]
        layout.headers.append(header)
        layout.names.append(name or f"column {place + 1}")
        layout.units.append(unit)
        if remark and layout.kinds[place] == NUMBER:
            notes.add(remark[0].upper() + remark[1:])
    _make_distinct(layout, notes)


def _make_distinct(layout: Layout, notes: Notes) -> None:
    seen: dict[str, int] = {}
    for place, name in enumerate(layout.names):
        if layout.kinds[place] == BLANK and place >= _used_width(layout):
            continue
        if name in seen:
            header = layout.headers[place]
            fresh = header if header and header not in seen else f"{name} ({place + 1})"
            while fresh in seen:
                fresh += "'"
            notes.add(f"Two columns are called {name!r}: the one in place {place + 1} is called {fresh!r} here.")
            layout.names[place] = name = fresh
        seen[name] = place
