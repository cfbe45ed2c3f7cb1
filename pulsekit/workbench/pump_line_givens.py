"""The fields of the pump-line workbench, top to bottom as the data flows: recordings, pump, liquid, line, end, what helps."""

from __future__ import annotations

from typing import Any

from ..quantities import from_si, pretty_unit
from .fields import choice_field, flag_field, group, quantity_field, text_field
from .pump_line_state import NEW_ELEMENTS, PumpLineState

__all__ = ["pump_line_givens"]

_LIQUIDS = {
    "hydraulic oil": ("grade", "temperature", "density", "viscosity", "bulk_modulus", "gas_release_pressure"),
    "water": ("temperature",),
    "glycerol solution": ("mass_fraction", "temperature", "bulk_modulus", "vapour_pressure"),
    "given": ("density", "viscosity", "bulk_modulus", "vapour_pressure", "gas_release_pressure"),
}
_HINTS = {
    "density": "870 kg/m^3", "viscosity": "40 mm^2/s", "temperature": "45 degC", "bulk_modulus": "1.6 GPa", "vapour_pressure": "0.023 bar(a)",
    "gas_release_pressure": "0.8 bar(a)", "mass_fraction": "0.40", "length": "2.4 m", "radius": "8 mm", "diameter": "16 mm", "outer_diameter": "20 mm",
    "wall_thickness": "2 mm", "wave_speed": "1300 m/s", "young_modulus": "207 GPa", "loss_factor": "0.1", "pressure_drop": "3 bar", "flow": "38 L/min",
    "volume": "0.5 L", "gas_volume": "0.3 L", "pressure": "180 bar(a)", "polytropic_exponent": "as nitrogen is", "nominal_volume": "0.5 L",
    "precharge": "60 bar(g)", "neck_length": "40 mm", "neck_radius": "6 mm", "rated_pressure": "315 bar", "relief_setting": "210 bar", "nominal_size": "DN20",
    "schedule": "80",
}  # fmt: skip
_ELEMENT = {
    "pipe": ("length", "radius", "diameter", "outer_diameter", "wall_thickness", "nominal_size", "schedule", "wave_speed", "young_modulus", "rated_pressure"),
    "hose": ("length", "radius", "diameter", "wave_speed", "loss_factor", "rated_pressure"),
    "restrictor": ("pressure_drop", "flow"),
    "volume": ("volume", "rated_pressure"),
    "gas damper": ("nominal_volume", "precharge", "gas_volume", "pressure", "polytropic_exponent", "neck_length", "neck_radius", "rated_pressure"),
    "side branch": (),
}  # fmt: skip
_PLAIN = ("nominal_size", "schedule")
_MOST_ELEMENTS = 30


def pump_line_givens(state: PumpLineState) -> list[dict[str, Any]]:
    """Return the groups of fields as JSON."""
    return [
        group("recordings", "Recordings", _recordings(state)),
        group("pump", "Pump and operation", _pump(state)),
        group("liquid", "Liquid", _liquid(state)),
        *_line(state),
        group("end", "End", _end(state)),
        group("help", "What helps", _help(state)),
        group("more", "Limits, title, units, uncertainty", _more(state), opened=False),
    ]


def _recordings(state: PumpLineState) -> list[dict[str, Any]]:
    items: list[dict[str, Any]] = [
        {
            "type": "file", "key": "station.0.file", "label": "Recording or case file", "value": state.text_of("station.0.file"),
            "error": state.errors.get("station.0.file", ""), "help": "choose, drop it here, or type its path; each pressure in it becomes a station",
        }
    ]  # fmt: skip
    for number in range(len(state.case.get("station") or [])):
        name = str(state.case.get(f"station.{number}.name") or number + 1)
        items += [
            text_field(state, f"station.{number}.column", f"Station {name}: column"),
            quantity_field(state, f"station.{number}.position", f"Station {name}: position", hint="0.4 m"),
            text_field(state, f"station.{number}.unit", f"Station {name}: unit", hint="as in the file"),
            choice_field(state, f"station.{number}.coupling", f"Station {name}: coupling", unset="dc"),
            _buttons(f"station {number}", [("remove", f"Remove station {name}", {"do": "remove_station", "number": number})]),
        ]
    items.append(text_field(state, "recording.trigger", "Column of the trigger", hint="none"))
    items.append(text_field(state, "cycles.harmonics", "Orders to keep", hint="by significance"))
    return items


def _buttons(key: str, rows: Any, label: str = "") -> dict[str, Any]:
    """A row of buttons: (label, accessible name, what is asked of the state) each."""
    return {
        "type": "buttons", "key": key, "label": label or key,
        "buttons": [{"label": word, "name": name, "asks": asks} for word, name, asks in rows],
    }  # fmt: skip


def _pump(state: PumpLineState) -> list[dict[str, Any]]:
    kind = str(state.case.get("source.kind") or "")
    items = [
        choice_field(state, "source.kind", "Source", unset="the stations' pressures"),
        quantity_field(state, "operation.speed", "Speed of the shaft", hint="1480 rpm", slider=True),
    ]
    if kind in ("plunger pump", "measured pressures", "measured pressure", ""):
        items.append(text_field(state, "source.plungers", "Plungers", hint="3"))
    if kind in ("axial piston pump", "measured pressures", "measured pressure", ""):
        items.append(text_field(state, "source.pistons", "Pistons", hint="9"))
    if kind == "plunger pump":
        items += [
            quantity_field(state, "source.rod_ratio", "Rod over crank", hint="5"), choice_field(state, "source.acting", "Acting", unset="single"),
            quantity_field(state, "source.valve_lag", "Valve lag", hint="0 deg"),
        ]  # fmt: skip
    if kind in ("plunger pump", "axial piston pump"):
        items.append(quantity_field(state, "source.dead_volume", "Dead volume", hint="2.8 mL"))
    if kind == "axial piston pump":
        items.append(quantity_field(state, "source.port_opening_angle", "Port opening angle", hint="10 deg"))
    if kind in ("flow trace", "measured pressure"):
        items += [
            text_field(state, "source.file", "File of the source"), text_field(state, "source.signal", "Column"),
            quantity_field(state, "source.station", "Station at", hint="0.3 m"),
        ]  # fmt: skip
    items += [
        quantity_field(state, "operation.mean_flow", "Mean flow", hint="38 L/min"),
        quantity_field(state, "operation.mean_pressure", "Mean pressure at 0 m", hint="180 bar"),
        text_field(state, "operation.speed_range", "Range of speeds", hint="600 rpm, 1500 rpm"),
        choice_field(state, "operation.rule", "Rule on pulsation", unset="by the pump's kind"),
    ]
    return items


def _liquid(state: PumpLineState) -> list[dict[str, Any]]:
    kind = str(state.case.get("fluid.kind") or "")
    items = [
        choice_field(
            state, "fluid.kind", "Kind", options=[[name, "density and viscosity" if name == "given" else name] for name in _LIQUIDS]
        )
    ]
    for name in _LIQUIDS.get(kind, ()):
        key = f"fluid.{name}"
        items.append(
            text_field(state, key, "ISO grade", hint="46")
            if name == "grade"
            else quantity_field(state, key, hint=_HINTS.get(name, ""), slider=name == "temperature")
        )
    if kind:
        items.append(quantity_field(state, "fluid.gas_fraction_at_atmosphere", "Free gas, as laboratories quote it", hint="1 %"))
    return items


def _line(state: PumpLineState) -> list[dict[str, Any]]:
    """One group per element, the selected one open, and a row to add more."""
    rows = state.elements
    groups = []
    for place, table in enumerate(rows[:_MOST_ELEMENTS]):
        kind = str(table.get("kind") or "pipe")
        key = f"element.{place}"
        items = [_moves(place, len(rows)), text_field(state, f"{key}.name", "Name")]
        named = [name for name in _ELEMENT.get(kind, ()) if _wanted(table, kind, name)]
        for name in named:
            dotted = f"{key}.{name}"
            if name in _PLAIN:
                items.append(text_field(state, dotted, hint=_HINTS.get(name, "")))
            else:
                items.append(
                    quantity_field(
                        state, dotted, hint=_HINTS.get(name, ""), slider=name in ("length", "nominal_volume", "gas_volume", "volume")
                    )
                )
        if kind == "side branch":
            items += _branch(state, key, table)
        error = state.errors.get(key, "")
        title = f"{place + 1}  {kind}" + (f": {table['name']}" if table.get("name") else "") + _size_of(state, place)
        if error:
            items.insert(1, {"type": "text", "key": key, "label": "Element", "value": "", "help": "", "hint": "", "error": error})
        groups.append(group(f"element-{place}", title, items, opened=place == state.selected))
    adds = [(f"+ {kind}", f"Add a {kind} behind the selected element", {"do": "add_element", "kind": kind}) for kind in NEW_ELEMENTS]
    groups.append(group("add", "Add to the line", [_buttons("add element", adds, "Add an element")]))
    return groups


def _wanted(table: dict[str, Any], kind: str, name: str) -> bool:
    """Ways that exclude each other: only the one in use and the usual one are offered."""
    if kind == "pipe":
        sizes = ("radius", "diameter", "outer_diameter", "nominal_size")
        used = next((size for size in sizes if table.get(size) is not None), "radius")
        if name in sizes:
            return name == used or (name in ("radius", "diameter") and used in ("radius", "diameter"))
        if name == "schedule":
            return used == "nominal_size"
    if kind == "hose" and name in ("radius", "diameter"):
        return True
    if kind == "gas damper":
        if name in ("gas_volume", "pressure"):
            return table.get("nominal_volume") is None
        if name in ("nominal_volume", "precharge"):
            return table.get("gas_volume") is None
    return True


def _moves(place: int, count: int) -> dict[str, Any]:
    rows = [
        ("↑ to the source", f"Move element {place + 1} towards the source", {"do": "move_element", "place": place, "by": -1}),
        ("↓ to the end", f"Move element {place + 1} towards the end", {"do": "move_element", "place": place, "by": 1}),
        ("remove", f"Remove element {place + 1}", {"do": "remove_element", "place": place}),
    ]
    found = _buttons(f"moves {place}", rows, f"Element {place + 1}")
    found["buttons"][0]["disabled"] = place == 0
    found["buttons"][1]["disabled"] = place == count - 1
    return found


def _branch(state: PumpLineState, key: str, table: dict[str, Any]) -> list[dict[str, Any]]:
    """Elements of a side branch, edited in place, and its end."""
    items: list[dict[str, Any]] = []
    for index, inner in enumerate(table.get("element") or []):
        kind = str(inner.get("kind") or "pipe")
        for name in _ELEMENT.get(kind, ()):
            if _wanted(inner, kind, name) and name not in _PLAIN and (inner.get(name) is not None or name in ("length", "radius")):
                items.append(
                    quantity_field(
                        state, f"{key}.element.{index}.{name}", f"Branch {kind}: {name.replace('_', ' ')}", hint=_HINTS.get(name, "")
                    )
                )
    items.append(choice_field(state, f"{key}.end.kind", "End of the branch"))
    return items


def _size_of(state: PumpLineState, place: int) -> str:
    """Length of an element behind its title."""
    key = f"element.{place}.length"
    if state.case.get(key) is None or key in state.refused:
        return ""
    given = state.case.given(key)
    return f", {float(from_si(given.value, given.unit)) if given.unit else given.value:.4g} {pretty_unit(given.unit or 'm')}"


def _end(state: PumpLineState) -> list[dict[str, Any]]:
    items = [choice_field(state, "end.kind", "Kind")]
    if state.case.get("end.kind") == "restrictor":
        items += [quantity_field(state, "end.pressure_drop", hint="60 bar"), quantity_field(state, "end.flow", hint="38 L/min")]
    if state.case.get("end.kind") == "impedance":
        items.append(quantity_field(state, "end.impedance", hint="1e10 Pa*s/m^3"))
    return items


def _help(state: PumpLineState) -> list[dict[str, Any]]:
    """What each change would do to the largest pulsation, and a button to keep it."""
    notes = ["Each change by itself, driven by the same flow at the source. Estimates to choose from, not designs; change anything only after isolating and bleeding "
             "both liquid and gas side."]  # fmt: skip
    if not state.help_is_current:
        return [
            {
                "type": "table",
                "key": "help",
                "label": "What helps",
                "head": ["Change", "Pulsation becomes"],
                "rows": [["being computed", ""]],
                "notes": notes,
            }
        ]
    rows = [[effect.name, effect.because or f"{100 * (effect.ratio or 0):.0f} % of what it is"] for effect in state.helped]
    keeps = [
        (f"keep {place + 1}", f"Keep the change: {effect.name}", {"do": "keep_change", "name": effect.name})
        for place, effect in enumerate(state.helped) if effect.ratio is not None
    ]  # fmt: skip
    return [
        {"type": "table", "key": "help", "label": "What helps", "head": ["Change", "Pulsation becomes"], "rows": rows, "notes": notes},
        _buttons("keep", keeps, "Keep a change as a variant"),
    ]


def _more(state: PumpLineState) -> list[dict[str, Any]]:
    units = [
        text_field(state, f"report.units.{name}", f"Unit of {name.replace('_', ' ')}", hint=hint)
        for name, hint in (("pressure", "bar"), ("flow_rate", "L/min"), ("length", "m"))
    ]
    return [
        quantity_field(state, "operation.minimum_inlet_pressure", "Least inlet pressure of the pump", hint="0.8 bar(a)"),
        quantity_field(state, "operation.wanted_reduction", "Wanted share of the pulsation", hint="50 %", spread=False),
        text_field(state, "title", "Title of the case"), text_field(state, "notes", "Notes"), *units,
        flag_field(state, "fluid.extrapolate", "Go beyond the measured range", unset="no"),
        text_field(state, "uncertainty.samples", "Monte Carlo samples", hint="4000"), text_field(state, "uncertainty.seed", "Seed", hint="20260"),
    ]  # fmt: skip
