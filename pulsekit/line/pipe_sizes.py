"""Bores of steel pipes by nominal size and schedule: ASME B36.10M, outer diameter and wall in millimetres (from memory).

A nominal size alone says nothing of the bore.
"""

from __future__ import annotations

from typing import Any

from ..errors import InputError

__all__ = ["PIPE_SIZES", "nominal_pipe"]

#: Nominal size (inches) -> outer diameter [mm], and wall [mm] per schedule.
PIPE_SIZES: dict[str, tuple[float, dict[str, float]]] = {
    "1/8": (10.3, {"40": 1.73, "80": 2.41}),
    "1/4": (13.7, {"40": 2.24, "80": 3.02}),
    "3/8": (17.1, {"40": 2.31, "80": 3.20}),
    "1/2": (21.3, {"40": 2.77, "80": 3.73, "160": 4.78, "XXS": 7.47}),
    "3/4": (26.7, {"40": 2.87, "80": 3.91, "160": 5.56, "XXS": 7.82}),
    "1": (33.4, {"40": 3.38, "80": 4.55, "160": 6.35, "XXS": 9.09}),
    "1 1/4": (42.2, {"40": 3.56, "80": 4.85, "160": 6.35, "XXS": 9.70}),
    "1 1/2": (48.3, {"40": 3.68, "80": 5.08, "160": 7.14, "XXS": 10.15}),
    "2": (60.3, {"40": 3.91, "80": 5.54, "160": 8.74, "XXS": 11.07}),
    "2 1/2": (73.0, {"40": 5.16, "80": 7.01, "160": 9.53, "XXS": 14.02}),
    "3": (88.9, {"40": 5.49, "80": 7.62, "160": 11.13, "XXS": 15.24}),
    "4": (114.3, {"40": 6.02, "80": 8.56, "120": 11.13, "160": 13.49, "XXS": 17.12}),
    "6": (168.3, {"40": 7.11, "80": 10.97, "120": 14.27, "160": 18.26, "XXS": 21.95}),
    "8": (219.1, {"40": 8.18, "80": 12.70, "120": 18.26, "160": 23.01, "XXS": 22.23}),
    "10": (273.0, {"40": 9.27, "80": 15.09, "120": 21.44, "160": 28.58}),
    "12": (323.8, {"40": 10.31, "80": 17.48, "120": 25.40, "160": 33.32}),
}
_METRIC = {"DN6": "1/8", "DN8": "1/4", "DN10": "3/8", "DN15": "1/2", "DN20": "3/4", "DN25": "1", "DN32": "1 1/4", "DN40": "1 1/2", "DN50": "2",
           "DN65": "2 1/2", "DN80": "3", "DN100": "4", "DN150": "6", "DN200": "8", "DN250": "10", "DN300": "12"}  # fmt: skip


def nominal_pipe(nominal_size: Any, schedule: Any) -> tuple[str, str]:
    """Return outer diameter and wall thickness of a pipe, as text with units.

    Raises
    ------
    InputError
        If only one of the two is given, or the table has no such pipe.

    Examples
    --------
    >>> nominal_pipe("2", "80")
    ('60.3 mm', '5.54 mm')
    """
    if nominal_size is None or schedule is None:
        raise InputError(
            f"a nominal size ({nominal_size!r}) is not a bore: give it with its schedule ({schedule!r}), or give the measured diameter", name="nominal_size",
            value=nominal_size,
        )  # fmt: skip
    size = str(nominal_size).strip().upper().replace("NPS", "").replace(" IN", "").replace('"', "").strip()
    size = _METRIC.get(size.replace(" ", ""), size)
    if size not in PIPE_SIZES:
        raise InputError(f"nominal_size = {nominal_size!r} is not in the table; it has {', '.join(PIPE_SIZES)}", name="nominal_size", value=nominal_size)
    outer, walls = PIPE_SIZES[size]
    wall = walls.get(str(schedule).upper().replace("SCH", "").strip())
    if wall is None:
        raise InputError(f"schedule = {schedule!r} is not in the table for size {size}; it has {', '.join(walls)}", name="schedule", value=schedule)
    return f"{outer} mm", f"{wall} mm"
