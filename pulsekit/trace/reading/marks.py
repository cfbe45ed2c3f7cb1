"""Decimal and thousands marks, settled from whole columns and never from one cell."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass

from .grammar import plain

__all__ = ["Evidence", "weigh"]

_DOT = re.compile(r"^[+-]?(\d*)\.(\d*)(?:[eEdD][+-]?\d+)?$")
_COMMA = re.compile(r"^[+-]?(\d*),(\d*)(?:[eEdD][+-]?\d+)?$")
_DOT_GROUPS = re.compile(r"^[+-]?[1-9]\d{0,2}(?:\.\d{3}){2,}$")
_COMMA_GROUPS = re.compile(r"^[+-]?[1-9]\d{0,2}(?:,\d{3}){2,}$")
_BOTH_DOT = re.compile(r"^[+-]?[1-9]\d{0,2}(?:,\d{3})+\.\d*$")
_BOTH_COMMA = re.compile(r"^[+-]?[1-9]\d{0,2}(?:\.\d{3})+,\d*$")


@dataclass
class Evidence:
    """Cells that speak for a mark: the first such (line, text) of each kind."""

    dot: tuple[int, str] | None = None  # 12.5: the dot is a decimal mark
    comma: tuple[int, str] | None = None  # 12,5
    dot_groups: tuple[int, str] | None = None  # 1.234.567: the dot parts thousands, so the comma is decimal
    comma_groups: tuple[int, str] | None = None
    dot_unclear: tuple[int, str] | None = None  # 1.234
    comma_unclear: tuple[int, str] | None = None
    grouped: tuple[int, str] | None = None  # 1,234.5 or 1.234,5: both marks in one cell

    def decimal(self) -> str | None:
        """Return the mark that is settled, or None."""
        for_dot = self.dot or self.comma_groups
        for_comma = self.comma or self.dot_groups
        if for_dot and for_comma:
            return None
        return "." if for_dot else "," if for_comma else None

    @property
    def torn(self) -> tuple[tuple[int, str], tuple[int, str]] | None:
        """Two cells that contradict each other."""
        for_dot = self.dot or self.comma_groups
        for_comma = self.comma or self.dot_groups
        return (for_dot, for_comma) if for_dot and for_comma else None

    def take(self, cell: str, line: int) -> None:
        """Weigh one cell."""
        if "." not in cell and "," not in cell:
            return
        text = plain(cell)
        if match := _DOT.match(text):
            if _grouplike(match[1], match[2], text):
                self.dot_unclear = self.dot_unclear or (line, text)
            elif match[1] or match[2]:
                self.dot = self.dot or (line, text)
        elif match := _COMMA.match(text):
            if _grouplike(match[1], match[2], text):
                self.comma_unclear = self.comma_unclear or (line, text)
            elif match[1] or match[2]:
                self.comma = self.comma or (line, text)
        elif _BOTH_DOT.match(text):
            self.dot = self.dot or (line, text)
            self.grouped = self.grouped or (line, text)
        elif _BOTH_COMMA.match(text):
            self.comma = self.comma or (line, text)
            self.grouped = self.grouped or (line, text)
        elif _DOT_GROUPS.match(text):
            self.dot_groups = self.dot_groups or (line, text)
        elif _COMMA_GROUPS.match(text):
            self.comma_groups = self.comma_groups or (line, text)


def _grouplike(before: str, after: str, text: str) -> bool:
    """1,234 may be a thousand-odd; 0,234 and 1234,567 and 1,23 cannot."""
    return len(after) == 3 and 1 <= len(before) <= 3 and not before.startswith("0") and not re.search("[eEdD]", text)


def weigh(rows: Iterable[tuple[int, Iterable[str]]], evidence: Evidence | None = None) -> Evidence:
    """Weigh the cells of rows, each (line, cells)."""
    evidence = evidence or Evidence()
    for line, cells in rows:
        for cell in cells:
            evidence.take(cell, line)
    return evidence
