"""The verdict on each assumption behind a tube's flow, for this very case."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..appraisal.finding import Check, Checks
from ..exact.periodic import extremes
from ..exact.similarity import dean_number, entrance_length, reynolds_number, stokes_layer_reynolds_number
from .check_context import Context, judged
from .liquid_checks import correlation_check, newtonian_check
from .recording_checks import recording_checks

__all__ = ["Context", "tube_checks"]

_LAMINAR_MEAN, _TURBULENT_MEAN = 2040.0, 3000.0
_STOKES_DOUBT, _STOKES_FAIL = 200.0, 500.0
_AVILA = "K. Avila et al., Science 333 (2011) 192: 2040 ± 10; R. Trip et al., Phys. Fluids 24 (2012) 014103: pulsating flow, 2250 to 3000"
_STOKES = "bursts from about 500 to 550 (Hino 1976, Eckmann & Grotberg 1991, from memory); momentary instability in much of the cycle near 200 (Blondeaux & Vittori 2021)"
_DURST = "F. Durst et al., J. Fluids Eng. 127 (2005) 1154 (from memory)"


def _heard(verdict: str, context: Context, name: str, limit: float) -> tuple[str, str]:
    found = context.finding(name)
    heard = judged(verdict, None if found is None else found > limit)
    return heard.verdict, heard.words


def _laminar(flow: Any, context: Context) -> list[Check]:
    low, high, _, _ = (float(v) for v in extremes(flow.mean_velocity.coefficients))
    diameter = 2 * flow.tube.length_scale
    kinematic = flow.fluid.viscosity / flow.fluid.density
    mean = float(reynolds_number(velocity=flow.mean_velocity.mean, diameter=diameter, kinematic_viscosity=kinematic))
    peak = float(reynolds_number(velocity=max(abs(low), abs(high)), diameter=diameter, kinematic_viscosity=kinematic))
    layer = float(
        stokes_layer_reynolds_number(
            velocity_amplitude=0.5 * (high - low), angular_frequency=flow.mean_velocity.angular_frequency, kinematic_viscosity=kinematic
        )
    )
    consequence = "if the flow is turbulent the wall shear is higher than stated and fluctuates"
    rows = []
    if flow.mean_known:
        verdict = "holds" if mean < _LAMINAR_MEAN else "doubtful" if mean < _TURBULENT_MEAN else "fails"
        verdict, words = _heard(verdict, context, "mean_reynolds_number", _LAMINAR_MEAN)
        rows.append(
            Check(
                name="laminar_mean", label="Laminar: mean flow", verdict=verdict, value=mean, limit=_LAMINAR_MEAN, source=_AVILA,
                because=f"The mean Reynolds number is {mean:.0f}; flow stays laminar below {_LAMINAR_MEAN:.0f}"
                + words + ("" if verdict == "holds" else f"; {consequence}") + ".",
            )
        )  # fmt: skip
        verdict = "holds" if peak < _LAMINAR_MEAN else "doubtful" if peak < 2 * _TURBULENT_MEAN else "fails"
        verdict, words = _heard(verdict, context, "peak_reynolds_number", _LAMINAR_MEAN)
        rows.append(
            Check(
                name="laminar_peak", label="Laminar: peak flow", verdict=verdict, value=peak, limit=_LAMINAR_MEAN, source=_AVILA,
                because=f"The Reynolds number at peak flow is {peak:.0f}; below {_LAMINAR_MEAN:.0f} no instant is in doubt"
                + words
                + ("" if verdict == "holds" else "; short peaks above it often stay laminar, the more so the faster they pass") + ".",
            )
        )  # fmt: skip
    else:
        for name, label in (("laminar_mean", "Laminar: mean flow"), ("laminar_peak", "Laminar: peak flow")):
            rows.append(
                Check(name=name, label=label, verdict="unknown", source=_AVILA, because="The mean flow is not known; give recording.mean_flow.")
            )  # fmt: skip
    verdict = "holds" if layer < _STOKES_DOUBT else "doubtful" if layer < _STOKES_FAIL else "fails"
    verdict, words = _heard(verdict, context, "stokes_layer_reynolds_number", _STOKES_FAIL)
    rows.append(
        Check(
            name="stokes_layer", label="Laminar: oscillating layer", verdict=verdict, value=layer, limit=_STOKES_FAIL, source=_STOKES,
            because=f"The Reynolds number of the oscillating layer is {layer:.0f}; turbulent bursts appear from about {_STOKES_FAIL:.0f}"
            + words + ".",
        )
    )  # fmt: skip
    return rows


def _developed(flow: Any, context: Context) -> list[Check]:
    low, high, _, _ = (float(v) for v in extremes(flow.mean_velocity.coefficients))
    diameter = 2 * flow.tube.length_scale
    kinematic = flow.fluid.viscosity / flow.fluid.density
    rows = []
    for name, label, speed in (
        ("developed", "Developed: mean flow", flow.mean_velocity.mean), ("developed_peak", "Developed: peak flow", max(abs(low), abs(high))),
    ):  # fmt: skip
        number = reynolds_number(velocity=speed, diameter=diameter, kinematic_viscosity=kinematic)
        need = float(entrance_length(reynolds_number=number, diameter=diameter))
        if context.distance_from_inlet is None:
            rows.append(
                Check(
                    name=name, label=label, verdict="unknown", limit=need, unit="m", source=_DURST,
                    because=f"The entrance length is {1e3 * need:.3g} mm; give tube.distance_from_inlet to compare. "
                    "Nearer the inlet the wall shear is higher than stated.",
                )
            )  # fmt: skip
            continue
        have = context.distance_from_inlet
        sampled = context.finding("mean_reynolds_number" if name == "developed" else "peak_reynolds_number")
        numbers = number if sampled is None else sampled
        short = np.asarray(context.spread("distance_from_inlet")) < entrance_length(reynolds_number=numbers, diameter=diameter)
        verdict = "holds" if have >= need else "doubtful" if have >= 0.5 * need or name == "developed_peak" else "fails"
        heard = judged(verdict, short)
        said = "is longer than" if have >= need else "is shorter than"
        rows.append(
            Check(
                name=name, label=label, verdict=heard.verdict, value=have, limit=need, unit="m", source=_DURST,
                because=f"The distance from the inlet of {1e3 * have:.4g} mm {said} the entrance length of {1e3 * need:.3g} mm{heard.words}"
                + ("." if have >= need else "; the wall shear there is higher than stated, by up to a factor of two close to the inlet."),
            )
        )  # fmt: skip
    return rows


def _rigid(flow: Any, context: Context) -> Check:
    label, source = (
        "Rigid wall, no wave effects",
        "radius enters the wall shear as its cube at a given flow; wave length against tube length, common practice",
    )
    if context.wave_alone:
        return Check(
            name="no_reflections", label="No reflected waves", verdict="doubtful", source="common practice",
            because="One pressure alone was taken as a wave in one direction; reflections are not known and can change the flow by a factor.",
        )  # fmt: skip
    if context.wall_motion is not None:
        motion = abs(context.wall_motion)
        heard = judged("holds" if motion < 0.03 else "doubtful" if motion < 0.1 else "fails", np.abs(context.spread("wall_motion")) >= 0.03)
        return Check(
            name="rigid_wall", label=label, verdict=heard.verdict, value=motion, limit=0.03, source=source,
            because=f"The radius changes by {100 * motion:.2g} % of its mean over the cycle; at a given flow the wall shear changes by about {300 * motion:.2g} % with it{heard.words}.",
        )  # fmt: skip
    if context.tube_length is not None:
        # 5 m/s: a soft artery's pulse wave, the least favourable usual speed.
        highest = flow.mean_velocity.frequency * max(flow.mean_velocity.count, 1)
        part = context.tube_length * flow.mean_velocity.frequency / 5.0
        verdict = "holds" if part < 0.05 else "doubtful"
        return Check(
            name="rigid_wall", label=label, verdict=verdict, value=part, limit=0.05, source=source,
            because=f"The tube of {1e3 * context.tube_length:.4g} mm is {100 * part:.2g} % of the fundamental's wave length at 5 m/s (the highest harmonic is "
            f"{highest:.3g} Hz); state tube.wall_motion to judge the wall itself.",
        )  # fmt: skip
    return Check(
        name="rigid_wall", label=label, verdict="unknown", source=source,
        because="Nothing is known of the wall: give tube.wall_motion (change of the radius over its mean) or tube.length.",
    )  # fmt: skip


def _straight(flow: Any, context: Context) -> Check:
    label, source = "Straight tube", "secondary flow is weak below a Dean number of about 20 (from memory)"
    if context.bend_radius is None:
        return Check(
            name="straight",
            label=label,
            verdict="unknown",
            source=source,
            because="Whether the tube bends is not stated; give tube.bend_radius.",
        )
    kinematic = flow.fluid.viscosity / flow.fluid.density
    radius = flow.tube.length_scale
    number = reynolds_number(velocity=flow.mean_velocity.mean, diameter=2 * radius, kinematic_viscosity=kinematic)
    dean = float(dean_number(reynolds_number=number, radius=radius, bend_radius=context.bend_radius))
    sampled = context.finding("mean_reynolds_number")
    deans = dean_number(reynolds_number=number if sampled is None else sampled, radius=radius, bend_radius=context.spread("bend_radius"))
    heard = judged("holds" if dean < 20 else "doubtful" if dean < 100 else "fails", np.asarray(deans) >= 20)
    return Check(
        name="straight", label=label, verdict=heard.verdict, value=dean, limit=20.0, source=source,
        because=f"The Dean number of the bend is {dean:.3g}{heard.words}; above about 20 the flow swirls, and the wall shear is higher outside the bend and lower inside.",
    )  # fmt: skip


def _axisymmetric(context: Context) -> Check:
    label = "Axisymmetric profile"
    source = "in human carotid arteries about 60 % of profiles are skewed over the cycle (Ford 2008)"
    if context.axisymmetric is None:
        return Check(
            name="axisymmetric", label=label, verdict="unknown", source=source,
            because="Whether the profile was seen to be axisymmetric is not stated (tube.axisymmetric); a skewed profile has higher and lower wall shear around "
            "the section than the mean stated here.",
        )  # fmt: skip
    return Check(
        name="axisymmetric", label=label, verdict="holds" if context.axisymmetric else "fails", source=source,
        because="The profile was stated to be axisymmetric." if context.axisymmetric
        else "The profile was stated to be skewed: the wall shear here is a mean around the section.",
    )  # fmt: skip


def _envelope(flow: Any, context: Context) -> list[Check]:
    """Where the axis does not hold the largest velocity, an envelope is not the centreline's."""
    if context.quantity not in ("centreline_velocity", "velocity_envelope"):
        return []
    radius = np.linspace(0.0, flow.tube.length_scale, 33)
    field = np.asarray(flow.velocity(radius, np.arange(128) * flow.mean_velocity.period / 128))
    greatest = float(np.abs(field).max()) or 1.0
    apart = float(np.max(np.abs(field).max(axis=0) - np.abs(field[0]))) / greatest
    if context.quantity == "velocity_envelope":
        return [
            Check(
                name="envelope_is_centreline", label="Envelope solved as the largest velocity", verdict="holds", value=apart,
                because=f"The envelope was solved as the largest velocity in the section, which differs from the axis' by up to {100 * apart:.2g} % of the peak.",
            )
        ]  # fmt: skip
    verdict = "holds" if apart < 0.03 else "doubtful"
    return [
        Check(
            name="envelope_is_centreline", label="Velocity on the axis is the largest", verdict=verdict, value=apart, limit=0.03,
            because=f"In the solved flow the largest velocity in the section exceeds that on the axis by up to {100 * apart:.2g} % of the peak"
            + ("." if verdict == "holds" else '; if the record is an envelope, say quantity = "velocity_envelope".'),
        )
    ]  # fmt: skip


def tube_checks(flow: Any, context: Context | None = None, **known: Any) -> Checks:
    """Return the verdict on each assumption.

    Parameters
    ----------
    flow : TubeFlow
    context : Context, optional
        What is known of the case; or its fields as keywords.

    Returns
    -------
    Checks
        A check that lacks an input says ``unknown`` and names the input.

    Examples
    --------
    >>> import pulsekit.trace as trace
    >>> from pulsekit.fluids import Fluid
    >>> from pulsekit.tube import CircularTube, solve
    >>> flow = solve(trace.Harmonics(frequency=1.2, coefficients=[7e-6]), quantity="flow_rate",
    ...              tube=CircularTube(radius="3.1 mm"), fluid=Fluid(density="1060 kg/m^3", viscosity="3.5 mPa*s"))
    >>> tube_checks(flow)["laminar_mean"].verdict
    'holds'
    """
    context = context or Context(**known)
    rows = [
        *_laminar(flow, context),
        *_developed(flow, context),
        newtonian_check(flow, context),
        _rigid(flow, context),
        _straight(flow, context),
    ]
    rows += recording_checks(flow, context)
    rows += [_axisymmetric(context), correlation_check(flow), *_envelope(flow, context)]
    return Checks(rows)
