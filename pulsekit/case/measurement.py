"""From the recording that a case names to the harmonics of the quantity that the tube is solved from.

What an instrument or a stated given does to the harmonics is a list of steps. The answer at the stated
givens and every Monte Carlo sample go through the same steps.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import CaseError, InputError
from ..exact.womersley import flow_factor
from ..quantities import Given
from ..trace import Harmonics, decompose
from .case import Case
from .instrument import Step, Values, added_to_mean, instrument_steps, orders_of, pair_steps, sampled
from .signals import Gathered, gather
from .workspace import Workspace, part_key

__all__ = ["Measurement", "measure"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Measurement:
    """The measured quantity on its way to the tube.

    ``raw`` are the harmonics as recorded (SI), ``steps`` what is done to their coefficients (samples first,
    harmonic axis last), ``givens`` the uncertain inputs of the steps, by dotted key; `coefficients` applies them.
    """

    gathered: Gathered
    cycles: Any
    raw: Harmonics
    quantity: str
    mean_known: bool
    steps: Sequence[Step] = ()
    givens: Mapping[str, Given] = field(default_factory=dict)
    remarks: tuple[str, ...] = ()

    def coefficients(self, raw: NDArray[np.complex128], values: Values) -> NDArray[np.complex128]:
        """Coefficients of the solved quantity for coefficients as recorded, shape (..., N + 1), and values of the givens."""
        out = np.array(raw, dtype=complex)
        for step in self.steps:
            out = step(out, values, self.raw.frequency)
        out[..., 0] = out[..., 0].real
        return out

    def harmonics(self, values: Values) -> Harmonics:
        """Harmonics of the solved quantity at given values; the covariance follows the steps' linear part."""
        coefficients = self.coefficients(self.raw.coefficients, values)
        origin = self.coefficients(np.zeros_like(self.raw.coefficients), values)
        # Every step is a gain per harmonic and perhaps a constant: the gain is what a unit harmonic becomes.
        gain = self.coefficients(np.ones_like(self.raw.coefficients), values) - origin
        scaled = self.raw.multiplied(gain)
        return scaled.replace(coefficients=coefficients)


def measure(case: Case, workspace: Workspace, *, progress: Any = None, stop: Any = None) -> Measurement:
    """Return the measured quantity of a wall-shear case."""
    gathered = workspace.remember(
        part_key("signal", case, "recording", "station"), lambda: gather(case, workspace, progress=progress, stop=stop)
    )
    cycles, raw = workspace.remember(part_key("harmonics", case, "recording", "station", "cycles"), lambda: _decomposed(case, gathered))
    quantity = str(case.get("recording.quantity") or "")
    if not quantity:
        raise case.missing("recording.quantity")
    steps: list[Step] = []
    givens: dict[str, Given] = {}
    remarks: list[str] = []
    if gathered.pair is not None:
        raw = pair_steps(case, gathered.pair, gathered.sections, cycles, raw, steps, givens, remarks)
    raw = instrument_steps(case, raw, steps, givens, remarks)
    _scale_and_offset(case, gathered, steps, givens)
    _doppler(case, quantity, steps, givens, remarks)
    quantity, mean_known = _to_solved(case, quantity, gathered, steps, givens, remarks)
    return Measurement(
        gathered=gathered, cycles=cycles, raw=raw, quantity=quantity, mean_known=mean_known, steps=tuple(steps), givens=givens,
        remarks=tuple(remarks),
    )  # fmt: skip


def _decomposed(case: Case, gathered: Gathered) -> tuple[Any, Harmonics]:
    cycles = gathered.cycles(case)
    count = case.get("cycles.harmonics")
    return cycles, decompose(cycles, count=None if count is None else int(count), weights=gathered.weights)


def _scale_and_offset(case: Case, gathered: Gathered, steps: list[Step], givens: dict[str, Given]) -> None:
    """Scale and offset of the calibration: 1 and 0, uncertain."""
    scale = case.maybe("recording.scale_uncertainty")
    if scale is not None:
        givens["recording.scale_uncertainty"] = Given(value=1.0, standard_uncertainty=scale.value, stated=True, text=f"1 ± {scale.value:g}")
        steps.append(lambda c, v, f: c * sampled(v["recording.scale_uncertainty"]))
    offset = case.maybe("recording.offset_uncertainty", gathered.dimension)
    if offset is not None:
        givens["recording.offset_uncertainty"] = Given(
            value=0.0, standard_uncertainty=offset.value, stated=True, dimension=gathered.dimension, text=f"0 ± {offset.value:g}"
        )
        steps.append(added_to_mean("recording.offset_uncertainty"))
    for key, given in gathered.givens.items():
        givens[key] = given
    steps.extend(gathered.steps)


def _doppler(case: Case, quantity: str, steps: list[Step], givens: dict[str, Given], remarks: list[str]) -> None:
    """Angle, spectral broadening and background of a velocity."""
    angle = case.maybe("recording.doppler_angle")
    if angle is not None:
        key = "recording.doppler_angle"
        givens[key] = angle
        if case.get("recording.angle_corrected") is False:
            steps.append(lambda c, v, f: c / np.cos(sampled(v[key])))
            remarks.append(f"Velocities along the beam were divided by the cosine of {case.get(key)}.")
        else:
            fixed = float(np.cos(angle.value))
            steps.append(lambda c, v, f: c * (fixed / np.cos(sampled(v[key]))))
            remarks.append(f"Velocities were taken as corrected for {case.get(key)}; the angle enters by its uncertainty only.")
    broad = case.maybe("recording.spectral_broadening")
    if broad is not None:
        key_b = "recording.spectral_broadening"
        givens[key_b] = broad
        steps.append(lambda c, v, f: c / (1.0 + sampled(v[key_b])))
        remarks.append(f"The envelope was lowered for spectral broadening of {case.get(key_b)}.")
    background = case.maybe("recording.background_velocity")
    if background is not None:
        key_v = "recording.background_velocity"
        givens[key_v] = background
        if quantity == "flow_rate":
            area = np.pi * case.given("tube.radius").value ** 2 if case.get("tube.radius") else np.pi * case.given("tube.diameter").value ** 2 / 4
            steps.append(lambda c, v, f: added_to_mean("b", -area)(c, {"b": v[key_v]}, f))
        else:
            steps.append(added_to_mean(key_v, -1.0))


def _to_solved(
    case: Case, quantity: str, gathered: Gathered, steps: list[Step], givens: dict[str, Given], remarks: list[str]
) -> tuple[str, bool]:
    """Turn what was measured into one of the quantities that the tube is solved from; tell whether the mean is known."""
    mean_known = gathered.mean_known
    if quantity == "flow_rate":
        radius = case.get("recording.computed_with_radius")
        if radius is None:
            remarks.append(
                "The flow rate counts as measured by itself, so that the wall shear goes with the cube of the radius; if the instrument made it from a "
                "velocity and this radius (computed_with_radius), the wall shear goes with the radius itself and its interval is narrower."
            )
        else:
            used = nominal_radius(case) if radius == "tube" else case.given("recording.computed_with_radius").value
            area = np.pi * used**2
            steps.append(lambda c, v, f: c / area)
            remarks.append(
                f"The flow rate was made by the instrument from a velocity with a radius of {used * 1e3:.4g} mm: the area was divided out, and the "
                "mean velocity is the measured quantity."
            )
            quantity = "mean_velocity"
    elif quantity in ("pressure_gradient", "pressure_drop") and (quantity == "pressure_drop" or gathered.needs_distance):
        if gathered.pair is not None and case.get("recording.distance") is None:
            ends = [f"{section}.position" for section in gathered.sections]
            givens |= {key: case.given(key) for key in ends}
            steps.append(lambda c, v, f: c / (sampled(v[ends[1]]) - sampled(v[ends[0]])))
        else:
            givens["recording.distance"] = case.given("recording.distance")
            steps.append(lambda c, v, f: c / sampled(v["recording.distance"]))
        quantity = "pressure_gradient"
    elif quantity == "pressure":
        givens["recording.wave_speed"] = case.given("recording.wave_speed")
        steps.append(_wave_step)
        quantity, mean_known = "mean_velocity", False
        remarks.append("One pressure alone was taken as a wave without reflections: only the oscillating part of the flow follows.")
    mean_flow = case.maybe("recording.mean_flow")
    if mean_flow is not None:
        givens["recording.mean_flow"] = mean_flow
        steps.append(_mean_from_flow(quantity))
        mean_known = True
        remarks.append(f"The mean is that of the stated mean_flow, {case.get('recording.mean_flow')}.")
    if quantity == "velocity_envelope" and not mean_known:
        raise InputError("a velocity envelope needs its mean; it cannot come from an AC-coupled channel", name="recording.coupling")
    return quantity, mean_known


def nominal_radius(case: Case) -> float:
    """Inner radius at the stated sizes. [m]"""
    from ..tube.sections import radius_of

    sizes = {name: case.given(f"tube.{name}").value for name in ("radius", "diameter", "outer_diameter", "wall_thickness") if case.get(f"tube.{name}")}
    if not sizes:
        raise case.missing("tube.radius")
    try:
        return float(radius_of(sizes))
    except KeyError as problem:
        raise CaseError("tube: give exactly one of radius, diameter, or outer_diameter with wall_thickness", key="tube.radius") from problem


def _wave_step(coefficients: NDArray[np.complex128], values: Values, frequency: float) -> NDArray[np.complex128]:
    """U_n = P_n sqrt(I2/I0)/(rho c): the characteristic impedance of a rigid-walled line per harmonic."""
    omega = 2 * np.pi * frequency * orders_of(coefficients)
    density, viscosity = sampled(values["density"]), sampled(values["viscosity"])
    alpha = sampled(values["radius"]) * np.sqrt(omega * density / viscosity)
    out = coefficients * np.sqrt(flow_factor(alpha)) / (density * sampled(values["recording.wave_speed"]))
    out[..., 0] = 0.0
    return np.asarray(out)


def _mean_from_flow(quantity: str) -> Step:
    def step(coefficients: NDArray[np.complex128], values: Values, frequency: float) -> NDArray[np.complex128]:
        radius = np.asarray(values["radius"])
        velocity = np.asarray(values["recording.mean_flow"]) / (np.pi * radius**2)
        factor = {
            "flow_rate": np.pi * radius**2, "mean_velocity": 1.0, "centreline_velocity": 2.0, "velocity_envelope": 2.0,
            "pressure_gradient": 8 * np.asarray(values["viscosity"]) / radius**2, "wall_shear_stress": 4 * np.asarray(values["viscosity"]) / radius,
        }[quantity]  # fmt: skip
        out = coefficients.copy()
        out[..., 0] = velocity * factor
        return out

    return step
