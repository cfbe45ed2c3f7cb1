"""What is known of a hydraulic oil: its grade, or its viscosities, and the rest that data sheets leave out."""

from __future__ import annotations

import math
import re
from typing import Any

from ..errors import InputError
from ..quantities import Given, parse_either, parse_given
from .oil import ISO_VISCOSITY_GRADES
from .ranges import above_zero

__all__ = ["oil_givens"]

#: Viscosity index where none is stated: mineral hydraulic oils of the HLP/HM kind have 95 to 105 (common practice).
USUAL_INDEX = Given(value=100.0, standard_uncertainty=10.0, dimension="ratio", stated=True, text="100 ± 10")


def oil_givens(
    *, grade: Any, viscosity_at_40: Any, viscosity_at_100: Any, viscosity_index: Any
) -> tuple[dict[str, Given], tuple[str, ...]]:
    """Return the givens that fix the viscosity of an oil against temperature, and the remarks on what was supplied.

    Raises
    ------
    InputError
        Neither or both of grade and viscosity_at_40; both of viscosity_at_100 and viscosity_index; a grade that is none.
    """
    if (grade is None) == (viscosity_at_40 is None):
        raise InputError(
            "hydraulic oil needs exactly one of grade (such as 46) and viscosity_at_40 (such as '44.8 mm^2/s'); "
            + ("neither was given" if grade is None else "both were given"),
            name="grade", value=grade,
        )  # fmt: skip
    if viscosity_at_100 is not None and viscosity_index is not None:
        raise InputError("viscosity_at_100 and viscosity_index say the same thing; give only one of them", name="viscosity_index")
    remarks: tuple[str, ...] = ()
    givens: dict[str, Given] = {}
    if grade is not None:
        givens["grade"], remarks = _grade(grade)
    else:
        givens["viscosity_at_40"] = _kinematic(viscosity_at_40, "viscosity_at_40")
    if viscosity_at_100 is not None:
        givens["viscosity_at_100"] = _kinematic(viscosity_at_100, "viscosity_at_100")
        at_40 = givens["viscosity_at_40"].value if grade is None else givens["grade"].value * 1e-6
        if givens["viscosity_at_100"].value >= at_40:
            raise InputError(
                f"viscosity_at_100 = {viscosity_at_100!r} is not below the viscosity at 40 °C ({at_40 * 1e6:.4g} mm²/s); were they swapped?",
                name="viscosity_at_100", value=viscosity_at_100,
            )  # fmt: skip
    elif viscosity_index is not None:
        givens["viscosity_index"] = parse_given(viscosity_index, "ratio", "viscosity_index")
    else:
        givens["viscosity_index"] = USUAL_INDEX
        remarks += (
            "No viscosity index was stated: 100 ± 10 (standard uncertainty) is used, as mineral hydraulic oils have (common practice).",
        )
    return givens, remarks


def _kinematic(value: Any, name: str) -> Given:
    given = above_zero(parse_either(value, ("kinematic_viscosity", "viscosity"), name), name)
    if given.dimension == "viscosity":
        raise InputError(
            f"{name} = {given.text} is a dynamic viscosity; data sheets of oils state the kinematic one: give it as '46 mm^2/s'",
            name=name,
            value=given.text,
        )
    return given


def _grade(grade: Any) -> tuple[Given, tuple[str, ...]]:
    text = re.sub(r"^\s*(iso\s*)?(vg\s*)?", "", grade, flags=re.IGNORECASE) if isinstance(grade, str) else grade
    given = parse_given(text, "ratio", "grade")
    if not any(math.isclose(given.value, known) for known in ISO_VISCOSITY_GRADES):
        near = sorted(ISO_VISCOSITY_GRADES, key=lambda known: abs(math.log(known / given.value)) if given.value > 0 else known)[:2]
        raise InputError(
            f"grade = {grade!r} is no ISO viscosity grade; the nearest are {min(near):g} and {max(near):g}. "
            "For an oil of another viscosity give viscosity_at_40, such as '41 mm^2/s'",
            name="grade", value=grade, allowed=", ".join(f"{known:g}" for known in ISO_VISCOSITY_GRADES),
        )  # fmt: skip
    if given.stated:
        return given, ()
    spread = Given(
        value=given.value, standard_uncertainty=0.1 * given.value / math.sqrt(3.0), dimension="ratio", shape="rectangular", stated=True,
        text=f"{given.value:g} ± 10 % (limits)",
    )  # fmt: skip
    return spread, (f"ISO VG {given.value:g} allows ±10 % in the viscosity at 40 °C (ISO 3448): taken as limits, in the interval.",)
