"""The words of a wall-shear report: what was asked, the method, a paragraph to paste, references, cautions."""

from __future__ import annotations

from typing import Any

from .drawing import shown, unit_of, unit_text
from .rows import finding_rows

__all__ = ["CAUTIONS", "LEAD_FINDINGS", "REFERENCES", "method", "paste", "question"]

LEAD_FINDINGS = ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "mean_flow_rate")

CAUTIONS = (
    "Estimates for engineering and research use: not for diagnosis or treatment decisions.",
    "The numbers hold for a long, straight, rigid tube. At inlets, tips, side holes, bends and narrowings the wall shear can be many "
    "times higher; nothing here is evidence of the absence of blood damage, clotting or disease, nor a basis for treatment or release.",
    "A wall-shear threshold from the literature is compared with the upper end of the worst cycle: it is exceeded, or not shown to be exceeded.",
    "Devices and pressurised rigs can injure: local codes, the maker's limits and licensed practice decide.",
)

REFERENCES = (
    "J. R. Womersley, Method for the calculation of velocity, rate of flow and viscous drag in arteries when the pressure gradient is known, "
    "J. Physiol. 127 (1955) 553–563.",
    "X. He, D. N. Ku, Pulsatile flow in the human left coronary artery bifurcation, J. Biomech. Eng. 118 (1996) 74–82 (oscillatory shear index).",
    "H. A. Himburg et al., Spatial comparison between wall shear stress measures and porcine arterial endothelial permeability, "
    "Am. J. Physiol. 286 (2004) H1916–H1922 (relative residence time).",
    "JCGM 101:2008, Evaluation of measurement data: propagation of distributions using a Monte Carlo method.",
    "F. Durst et al., The development lengths of laminar pipe and channel flows, J. Fluids Eng. 127 (2005) 1154–1160.",
)

QUANTITY_WORDS = {
    "flow_rate": "volume flow rate",
    "mean_velocity": "mean velocity over the section",
    "centreline_velocity": "velocity on the axis",
    "velocity_envelope": "largest velocity in the section",
    "pressure_gradient": "pressure gradient between two stations",
    "pressure_drop": "pressure drop over a stated distance",
    "pressure": "pressure at one station, taken as a wave without reflections",
    "wall_shear_stress": "wall shear stress",
}


def quantity_words(answer: Any) -> str:
    """The measured quantity in words."""
    name = str(answer.case.get("recording.quantity"))
    return QUANTITY_WORDS.get(name, name.replace("_", " "))


def _sizes(answer: Any) -> str:
    radius = float(answer.flow.tube.radius)
    unit = unit_of(answer, "length")
    return f"radius {shown(answer, radius, 'length'):.4g} {unit_text(unit)}, diameter {shown(answer, 2 * radius, 'length'):.4g} {unit_text(unit)}"


def _liquid(answer: Any) -> str:
    fluid = answer.flow.fluid
    kind = str(answer.case.get("fluid.kind") or "given")
    unit = unit_of(answer, "viscosity")
    return f"{kind}, density {fluid.density:.5g} kg/m³, viscosity {shown(answer, fluid.viscosity, 'viscosity'):.4g} {unit_text(unit)}"


def question(answer: Any) -> list[tuple[str, str]]:
    """What was asked, as pairs of term and words."""
    harmonics, cycles = answer.harmonics, answer.cycles
    rows = [
        ("Recording", str(answer.provenance.get("file", answer.case.get("recording.file") or "given in code"))),
        ("Signal", f"{answer.signal.name} in {answer.signal.unit or 'SI units'}"),
        ("Measured quantity", quantity_words(answer)),
        ("Cycles", f"{cycles.count} used, mean period {cycles.period:.4g} s ({60 / cycles.period:.4g} per minute)"),
        ("Harmonics kept", f"{harmonics.count} of {harmonics.frequency:.4g} Hz"),
        ("Tube", f"circular, {_sizes(answer)}"),
        ("Liquid", _liquid(answer)),
    ]
    return rows


def method(answer: Any) -> list[str]:
    """How the numbers were made, in a few sentences with the equations."""
    return [
        "The recording was cut into cycles and the mean cycle written as harmonics, x(t) = Re Σ Xₙ exp(i n ω t), n = 0 … N. "
        f"N = {answer.harmonics.count} by significance against the noise, unless stated.",
        "Each harmonic was carried from the measured quantity to all others by the exact solution of the momentum equation for "
        "fully developed, laminar, incompressible flow of a Newtonian liquid in a straight rigid tube [1]. With α = R √(n ω ρ/μ), ζ = √i α "
        "and the modified Bessel functions I: wall shear τ R/(μ U) = ζ I₁/I₂, pressure gradient G R²/(μ U) = ζ² I₀/I₂, profile "
        "u(r)/U = (I₀(ζ) − I₀(ζ r/R))/I₂(ζ), U being the mean over the section. The mean is α = 0 of the same functions (Poiseuille).",
        "Mean absolute wall shear and the oscillatory shear index [2], OSI = (1 − |mean τ|/mean |τ|)/2, were integrated between located sign "
        "changes; the relative residence time is 1/|mean τ| [3]. Extremes were located between instants.",
        "Standard uncertainties of the givens and the covariance of the harmonics were propagated by Monte Carlo [4]; intervals are central "
        "95 % and hold if the model holds. The entrance length of the checks follows [5].",
    ]


def paste(answer: Any) -> str:
    """A methods paragraph filled with this case's numbers."""
    rows = {row.name: row for row in finding_rows(answer.findings)}

    def said(name: str) -> str:
        row = rows.get(name)
        if row is None or row.value == "–":
            return "not available"
        spread = f" (95 % interval {row.interval})" if row.interval != "–" else ""
        return f"{row.value} {row.unit}".rstrip() + spread

    alpha = rows.get("womersley_number")
    failed = [check.label.lower() for check in answer.checks if check.verdict == "fails"]
    seed = answer.provenance.get("seed")
    samples = answer.provenance.get("samples")
    draws = f" ({samples} samples, seed {seed})" if samples else ""
    return (
        f"The {quantity_words(answer)} was averaged over {answer.cycles.count} cycle{'s' if answer.cycles.count != 1 else ''} (mean period "
        f"{answer.cycles.period:.3g} s) and expressed by {answer.harmonics.count} harmonics. Wall shear stress was computed per harmonic from the "
        f"exact solution for oscillating laminar flow in a rigid straight tube (Womersley 1955) with {_sizes(answer)}, {_liquid(answer)}; the "
        f"Womersley number of the fundamental was {alpha.value if alpha else 'not available'}. The time-averaged wall shear stress was "
        f"{said('time_averaged_wall_shear_stress')}, the peak {said('peak_wall_shear_stress')} and the oscillatory shear index "
        f"{said('oscillatory_shear_index')}. Intervals are from Monte Carlo propagation (JCGM 101){draws} of the stated standard uncertainties"
        + (f" and leave out: {', '.join(left_out_names(answer))}" if left_out_names(answer) else "")
        + (f". These assumptions failed their check: {', '.join(failed)}." if failed else ".")
        + f" Computed with PulseKit {answer.provenance.get('version', '')}.".replace(" .", ".")
    )


def left_out_names(answer: Any) -> list[str]:
    """Names of the inputs that count as exact."""
    names = []
    for entry in answer.left_out_inputs or ():
        names.append(str(getattr(entry, "key", entry)))
    return names
