"""Checks on the recording behind a tube's flow: periodic, resolved, closed, free of what the instrument did."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..appraisal.finding import Check
from ..exact.periodic import extremes
from ..trace.cycles import drift_of

__all__ = ["recording_checks"]


def _unknown(name: str, label: str, because: str, source: str = "") -> Check:
    return Check(name=name, label=label, verdict="unknown", because=because, source=source)


def _periodic(context: Any) -> list[Check]:
    cycles = context.cycles
    label = "Periodic: cycles alike"
    if cycles is None or cycles.count < 2:
        words = (
            "One cycle only: how much cycles differ is not known; record several."
            if cycles is not None
            else "No recording: the harmonics were given."
        )
        return [_unknown("periodic", label, words)]
    folded = cycles.folded((np.arange(64) + 0.5) / 64)
    mean = np.nanmean(folded, axis=0)
    swing = float(np.ptp(mean)) or 1.0
    scatter = float(np.sqrt(np.nanmean((folded - mean) ** 2))) / swing
    left_out = len(cycles.left_out)
    verdict = "holds" if scatter < 0.1 and 3 * left_out <= cycles.count else "doubtful" if scatter < 0.25 else "fails"
    rows = [
        Check(
            name="periodic", label=label, verdict=verdict, value=scatter, limit=0.1, source="our allowance",
            because=f"Single cycles scatter about the mean cycle by {100 * scatter:.2g} % of its swing (rms), their periods by {100 * cycles.period_scatter:.2g} %; "
            f"{left_out} of {left_out + cycles.count} cycles were left out.",
        )
    ]  # fmt: skip
    drift = abs(drift_of(cycles))
    if cycles.count >= 4:
        verdict = "holds" if drift < 0.1 else "doubtful" if drift < 0.3 else "fails"
        rows.append(
            Check(
                name="drift", label="Periodic: no drift", verdict=verdict, value=drift, limit=0.1, source="our allowance",
                because=f"The base line moves by {100 * drift:.2g} % of the swing over the record; a drift moves the mean and leaks into the low harmonics.",
            )
        )  # fmt: skip
    return rows


def _closure(context: Any) -> list[Check]:
    cycles = context.cycles
    if cycles is None:
        return []
    label = "Closed cycle"
    if cycles.gap:
        verdict = "doubtful"
        return [
            Check(
                name="cycle_closure", label=label, verdict=verdict, value=cycles.gap, limit=0.15,
                because=f"The gated cycle stops {100 * cycles.gap:.1f} % of the period short of its end; the harmonics bridge the gap.",
            )
        ]  # fmt: skip
    # Next to the seam the curve is read at samples' distance, so that nothing is drawn across it.
    apart = 1.0 / _samples_per_cycle(cycles)
    folded = np.nanmean(cycles.folded(np.array([0.0, apart, 1 - 2 * apart, 1 - apart])), axis=0)
    swing = float(np.ptp(context.harmonics.evaluate(np.linspace(0, context.harmonics.period, 128)))) or 1.0
    usual = abs(float(folded[1] - folded[0])) + abs(float(folded[3] - folded[2]))
    step = max(abs(float(folded[0] - folded[3])) - usual, 0.0) / swing
    verdict = "holds" if step < 0.05 else "doubtful" if step < 0.2 else "fails"
    return [
        Check(
            name="cycle_closure", label=label, verdict=verdict, value=step, limit=0.05, source="our allowance",
            because=f"Where the cycle closes, the mean curve steps by {100 * step:.2g} % of its swing beyond its slope there; a step feeds the high harmonics, to which wall shear is sensitive.",
        )
    ]  # fmt: skip


def _samples_per_cycle(cycles: Any) -> float:
    return float(cycles.samples[0].size / cycles.count)


def _beyond(cycles: Any, harmonics: Any, per_cycle: float) -> float:
    """What the mean cycle holds beyond the kept harmonics, each weighed as in the wall shear by the root of its order, over what is kept."""
    count = harmonics.count
    size = int(min(per_cycle, 512))
    last = min(2 * count + 4, (size - 1) // 2)
    kept = float(np.sum(np.arange(1, count + 1) * harmonics.amplitude[1:] ** 2))
    if kept == 0:
        return 0.0
    folded = cycles.folded(np.arange(size) / size)
    if last <= count or not np.isfinite(folded).any(axis=0).all():
        # No samples to tell: what the last kept harmonic carries the next may carry too.
        return float(harmonics.amplitude[-1] * np.sqrt(count / kept))
    mean = np.nanmean(folded, axis=0)
    power = np.abs(np.fft.rfft(mean)[count + 1 : last + 1] * 2 / size) ** 2
    return float(np.sqrt(np.sum(np.arange(count + 1, last + 1) * power) / kept))


def _resolved(context: Any) -> list[Check]:
    cycles, harmonics = context.cycles, context.harmonics
    if cycles is None or harmonics is None:
        return [_unknown("resolved", "Resolved in time", "No recording: what lies beyond the given harmonics is not known.")]
    per_cycle = _samples_per_cycle(cycles)
    tail = _beyond(cycles, harmonics, per_cycle)
    samples_ok = per_cycle >= 2.5 * max(harmonics.count, 1) and per_cycle >= 16
    verdict = "holds" if samples_ok and tail < 0.1 else "doubtful"
    said = "" if context.antialias_filter else " Aliasing cannot be excluded from the samples; state recording.antialias_filter."
    return [
        Check(
            name="resolved", label="Resolved in time", verdict=verdict, value=per_cycle, limit=2.5 * harmonics.count, source="sampling theorem with a margin",
            because=f"{per_cycle:.4g} samples per cycle hold {harmonics.count} harmonics; what the samples show beyond them is {100 * tail:.2g} % of the oscillating wall "
            f"shear.{said}",
        )
    ]  # fmt: skip


def _noise(context: Any) -> list[Check]:
    harmonics = context.harmonics
    if harmonics is None or harmonics.standard_error is None or harmonics.count == 0:
        return []
    errors = np.sqrt(np.sum(np.asarray(harmonics.standard_error)[1:] ** 2, axis=1))
    weight = np.sqrt(np.arange(1, harmonics.count + 1))
    ratio = float(np.sqrt(np.sum((errors * weight) ** 2)) / (np.sqrt(np.sum((harmonics.amplitude[1:] * weight) ** 2)) or 1.0))
    verdict = "holds" if ratio < 0.1 else "doubtful" if ratio < 0.3 else "fails"
    return [
        Check(
            name="noise", label="Harmonics stand out of the noise", verdict=verdict, value=ratio, limit=0.1, source="our allowance",
            because=f"Weighed as in the wall shear, the standard error of the kept harmonics is {100 * ratio:.2g} % of them.",
        )
    ]  # fmt: skip


def _instrument(flow: Any, context: Any) -> list[Check]:
    label = "Instrument response"
    if context.cycles is None:
        return []
    if context.instrument_known:
        return [
            Check(
                name="instrument_response", label=label, verdict="holds", because="The instrument's response was stated and undone per harmonic.",
                source="as stated in the case",
            )
        ]  # fmt: skip
    shear = flow.wall_shear_stress
    order = np.arange(shear.count + 1)
    s = 1j * order * shear.frequency / 30.0
    gain = 1 + np.sqrt(2) * s + s**2
    # Undone as a stated filter is: harmonics that would be magnified more than threefold stay as they are.
    undone = shear.coefficients * np.where(np.abs(gain) <= 3, gain, 1.0)
    before, after = (max(abs(float(v)) for v in extremes(c)[:2]) for c in (shear.coefficients, undone))
    change = 100 * (after / before - 1) if before else 0.0
    return [
        _unknown(
            "instrument_response", label,
            f"What filter the instrument has is not stated (recording.low_pass, or natural_frequency and damping_ratio); behind one of 30 Hz the true peak wall "
            f"shear would be about {abs(change):.1f} % {'higher' if change >= 0 else 'lower'}.",
        )
    ]  # fmt: skip


def _sampled_where(context: Any) -> list[Check]:
    if context.quantity != "mean_velocity":
        return []
    label = "Mean velocity over the whole lumen"
    if context.sample_volume is None:
        return [
            _unknown(
                "sample_volume", label, 'Where the mean velocity was sampled is not stated; give recording.sample_volume = "whole lumen".'
            )
        ]
    whole = context.sample_volume.strip().lower() == "whole lumen"
    return [
        Check(
            name="sample_volume", label=label, verdict="holds" if whole else "doubtful",
            because=f"The sample volume was stated as {context.sample_volume!r}"
            + ("." if whole else "; a smaller one near the axis reads up to twice the mean velocity."),
        )
    ]  # fmt: skip


def recording_checks(flow: Any, context: Any) -> list[Check]:
    """Return the checks on the recording; without one, what can be said of given harmonics."""
    return [
        *_periodic(context), *_closure(context), *_resolved(context), *_noise(context), *_instrument(flow, context), *_sampled_where(context),
    ]  # fmt: skip
