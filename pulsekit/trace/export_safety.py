"""Text that leaves for a spreadsheet: it must stay text."""

from __future__ import annotations

__all__ = ["escape_spreadsheet"]

_STARTERS = ("=", "+", "-", "@", "\t", "\r", "\n", "|", "%", "＝", "＋", "－", "＠")


def escape_spreadsheet(text: str) -> str:
    """Return a cell's text such that no spreadsheet takes it for a formula.

    Numbers stay as they are.

    >>> escape_spreadsheet("=cmd|' /C calc'!A0"), escape_spreadsheet("-3.2"), escape_spreadsheet("flow")
    ("'=cmd|' /C calc'!A0", '-3.2', 'flow')
    """
    if not text.lstrip(" ").startswith(_STARTERS):
        return text
    try:
        float(text)
    except ValueError:
        return "'" + text
    return text
