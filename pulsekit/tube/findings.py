"""Every finding of a tube's flow over one cycle, exact for the kept harmonics."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from ..appraisal.finding import Finding, Findings
from ..exact.periodic import extremes, mean_positive
from ..exact.similarity import reynolds_number, stokes_layer_thickness
from .peak import peak_velocity

__all__ = ["TUBE_FINDINGS", "peak_velocity", "tube_findings", "tube_values"]

_NO_MEAN = "The mean was not measured: only the oscillating part is known. State mean_flow to have it."
_VELOCITIES = ("mean_velocity", "centreline_velocity", "velocity_envelope")


class _Row(NamedTuple):
    label: str
    unit: str
    needs_mean: bool


#: Name -> label, SI unit, and whether it needs the mean, in the order in which people read them.
TUBE_FINDINGS: dict[str, _Row] = {
    "time_averaged_wall_shear_stress": _Row("Time-averaged wall shear stress, mean of |τ|", "Pa", True),
    "peak_wall_shear_stress": _Row("Peak wall shear stress, largest |τ|", "Pa", True),
    "oscillatory_shear_index": _Row("Oscillatory shear index", "", True),
    "relative_residence_time": _Row("Relative residence time, 1/|mean τ|", "1/Pa", True),
    "mean_wall_shear_stress": _Row("Mean wall shear stress", "Pa", True),
    "minimum_wall_shear_stress": _Row("Minimum wall shear stress, signed", "Pa", True),
    "greatest_wall_shear_stress": _Row("Greatest wall shear stress, signed", "Pa", True),
    "forward_wall_shear_stress": _Row("Forward wall shear stress, mean of its forward part", "Pa", True),
    "backward_wall_shear_stress": _Row("Backward wall shear stress, mean of its backward part", "Pa", True),
    "time_of_peak_wall_shear": _Row("Time of peak wall shear in the cycle", "s", True),
    "steady_wall_shear_stress": _Row("Steady wall shear stress of the mean flow, 4 μ Q/(π R³)", "Pa", True),
    "time_averaged_wall_shear_rate": _Row("Time-averaged wall shear rate", "1/s", True),
    "peak_wall_shear_rate": _Row("Peak wall shear rate", "1/s", True),
    "quasi_steady_shear_rate_of_mean_velocity": _Row("Quasi-steady peak shear rate, 8 U/D of the largest mean velocity", "1/s", True),
    "quasi_steady_shear_rate_of_centreline_velocity": _Row("Quasi-steady peak shear rate, 4 u₀/D of the largest axis velocity", "1/s", True),
    "mean_flow_rate": _Row("Mean flow rate", "m^3/s", True),
    "peak_flow_rate": _Row("Peak flow rate", "m^3/s", True),
    "minimum_flow_rate": _Row("Minimum flow rate", "m^3/s", True),
    "forward_flow_rate": _Row("Forward flow rate, mean of its forward part", "m^3/s", True),
    "backward_flow_rate": _Row("Backward flow rate, mean of its backward part", "m^3/s", True),
    "backward_fraction": _Row("Backward fraction, backward over forward flow", "", True),
    "volume_per_cycle": _Row("Volume per cycle", "m^3", True),
    "flow_pulsatility_index": _Row("Flow pulsatility index, (max − min)/mean of the flow rate", "", True),
    "velocity_pulsatility_index": _Row("Velocity pulsatility index, (max − min)/mean of the measured velocity", "", True),
    "velocity_resistive_index": _Row("Velocity resistive index, (peak − end-diastolic)/peak", "", True),
    "peak_velocity": _Row("Peak velocity anywhere in the section", "m/s", True),
    "mean_pressure_gradient": _Row("Mean pressure gradient", "Pa/m", True),
    "pressure_gradient_amplitude": _Row("Pressure gradient amplitude, half of its peak to peak", "Pa/m", False),
    "womersley_number": _Row("Womersley number of the fundamental", "", False),
    "stokes_layer_thickness": _Row("Stokes layer thickness", "m", False),
    "mean_reynolds_number": _Row("Mean Reynolds number", "", True),
    "peak_reynolds_number": _Row("Peak Reynolds number", "", True),
    "pumping_power_per_length": _Row("Pumping power per length", "W/m", True),
}


def _ratio(top: float, bottom: float) -> float | None:
    return None if bottom == 0 or not np.isfinite(top / bottom) else float(top / bottom)


def tube_values(flow: Any) -> dict[str, float | None]:
    """Values of all findings in SI; None where a value does not exist."""
    fluid, tube, period = flow.fluid, flow.tube, flow.mean_velocity.period
    omega = flow.mean_velocity.angular_frequency
    velocity, shear = flow.mean_velocity.coefficients, flow.wall_shear_stress.coefficients
    gradient, axis = flow.pressure_gradient.coefficients, flow.centreline_velocity.coefficients
    low, high, at_low, at_high = extremes(np.stack([velocity, shear, gradient, axis]))
    (low_u, low_s, low_g, low_a), (high_u, high_s, high_g, high_a) = low.tolist(), high.tolist()
    low_at, high_at = float(at_low[1]), float(at_high[1])
    mean_u, mean_s = float(velocity[0].real), float(shear[0].real)
    forward_u, forward_s = mean_positive(np.stack([velocity, shear])).tolist()
    backward_u, backward_s = max(forward_u - mean_u, 0.0), max(forward_s - mean_s, 0.0)
    absolute_s = 2 * forward_s - mean_s  # mean abs(x) = 2 mean max(x, 0) - mean x
    peak_s, at = (high_s, high_at) if high_s >= -low_s else (-low_s, low_at)
    scale, viscosity = tube.length_scale, fluid.viscosity
    kinematic = viscosity / fluid.density
    values: dict[str, float | None] = {
        "time_averaged_wall_shear_stress": absolute_s,
        "peak_wall_shear_stress": peak_s,
        # As a ratio of same-signed means: exactly 0 without reversal, never below.
        "oscillatory_shear_index": None if absolute_s == 0 else min(forward_s, backward_s) / (forward_s + backward_s),
        "relative_residence_time": _ratio(1.0, abs(mean_s)),
        "mean_wall_shear_stress": mean_s,
        "minimum_wall_shear_stress": low_s,
        "greatest_wall_shear_stress": high_s,
        "forward_wall_shear_stress": forward_s,
        "backward_wall_shear_stress": backward_s,
        "time_of_peak_wall_shear": at / (2 * np.pi) * period,
        "steady_wall_shear_stress": 4 * viscosity * mean_u / scale,
        "time_averaged_wall_shear_rate": absolute_s / viscosity,
        "peak_wall_shear_rate": peak_s / viscosity,
        "quasi_steady_shear_rate_of_mean_velocity": 4 * max(abs(low_u), abs(high_u)) / scale,
        "quasi_steady_shear_rate_of_centreline_velocity": 2 * max(abs(low_a), abs(high_a)) / scale,
        "mean_flow_rate": mean_u * tube.area,
        "peak_flow_rate": high_u * tube.area,
        "minimum_flow_rate": low_u * tube.area,
        "forward_flow_rate": forward_u * tube.area,
        "backward_flow_rate": backward_u * tube.area,
        "backward_fraction": _ratio(backward_u, forward_u),
        "volume_per_cycle": mean_u * tube.area * period,
        "flow_pulsatility_index": _ratio(high_u - low_u, mean_u),
        "peak_velocity": peak_velocity(flow)[0],
        "mean_pressure_gradient": float(gradient[0].real),
        "pressure_gradient_amplitude": 0.5 * (high_g - low_g),
        "womersley_number": flow.womersley_number,
        "stokes_layer_thickness": float(stokes_layer_thickness(angular_frequency=omega, kinematic_viscosity=kinematic)),
        "mean_reynolds_number": float(reynolds_number(velocity=mean_u, diameter=2 * scale, kinematic_viscosity=kinematic)),
        "peak_reynolds_number": float(
            reynolds_number(velocity=max(abs(low_u), abs(high_u)), diameter=2 * scale, kinematic_viscosity=kinematic)
        ),
        # Mean of a product of two series: X_0 Y_0 + 1/2 sum Re(X_n conj(Y_n)).
        "pumping_power_per_length": tube.area * _mean_product(gradient, velocity),
    }
    if flow.quantity in _VELOCITIES:
        values |= _velocity_indices(flow.measured.coefficients)
    return values


def _mean_product(one: NDArray[np.complex128], other: NDArray[np.complex128]) -> float:
    product = one * other.conj()
    return float(product[0].real + 0.5 * product[1:].real.sum())


def _velocity_indices(measured: NDArray[np.complex128]) -> dict[str, float | None]:
    """Indices of the measured velocity; the end of diastole is the foot, the least value before the upstroke."""
    low, high, _, _ = (float(v) for v in extremes(measured))
    mean = float(measured[0].real)
    foot = float(measured.sum().real)  # at the onset of the cycle
    return {"velocity_pulsatility_index": _ratio(high - low, mean), "velocity_resistive_index": _ratio(high - foot, high)}


def _missing(name: str, value: float | None) -> str:
    if value is not None:
        return ""
    if name == "relative_residence_time":
        return "The mean wall shear stress is zero: a residence time does not exist."
    if name == "oscillatory_shear_index":
        return "There is no wall shear at all: the index does not exist."
    return "It divides by a quantity that is zero here and does not exist."


def tube_findings(flow: Any) -> Findings:
    """Return the findings of a flow, without intervals; None with a sentence where a value does not exist."""
    values = tube_values(flow)
    rows = []
    for name, row in TUBE_FINDINGS.items():
        if name not in values:
            continue
        value = values[name]
        because = _missing(name, value)
        if row.needs_mean and not flow.mean_known:
            value, because = None, _NO_MEAN
        rows.append(
            Finding(
                name=name, label=row.label, value=value, unit=row.unit, because=because, reliance="usable" if value is not None else "not usable"
            )
        )  # fmt: skip
    return Findings(rows)
