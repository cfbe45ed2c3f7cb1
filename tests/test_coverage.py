"""The 95 % intervals contain the truth: a short form of the study in coverage_study.py, whose long form runs as a script."""

from __future__ import annotations

import pytest
from coverage_study import FINDINGS, SCENARIOS, study
from scipy import stats

BY_NAME = {scenario.name: scenario for scenario in SCENARIOS}


def least_and_most(recordings: int) -> tuple[int, int]:
    """Number inside that a true coverage between 93 and 97 % leaves with a chance of one in ten thousand on either side."""
    return int(stats.binom.ppf(1e-4, recordings, 0.93)), int(stats.binom.ppf(1 - 1e-4, recordings, 0.97))


def held(scenario: str, recordings: int, samples: int) -> None:
    least, most = least_and_most(recordings)
    for name, row in study(BY_NAME[scenario], recordings, samples).items():
        inside = round(row["inside"] * recordings)
        assert least <= inside <= most, f"{name}: {inside} of {recordings} inside"
        # The misses lie on both sides: neither has more than a coverage of 93 % with all its misses there would leave.
        assert max(row["above"], row["below"]) * recordings <= stats.binom.ppf(1 - 1e-4, recordings, 0.05), f"{name}: {row}"
        # The truth varies and reverses: an index that is always zero would be covered for nothing.
        assert row["zero"] == 0


def test_the_short_form():
    held("recording alone, few cycles", 60, 600)


@pytest.mark.long
@pytest.mark.parametrize("scenario", [scenario.name for scenario in SCENARIOS])
def test_the_long_form(scenario):
    held(scenario, 500, 4000)


def test_a_different_seed_is_a_different_recording(tmp_path):
    from coverage_study import one_recording

    first, again, other = (one_recording(tmp_path, BY_NAME["everyday"], seed, 200) for seed in (1, 1, 2))
    assert first == again
    assert all(first[name][0] != other[name][0] for name in FINDINGS)
