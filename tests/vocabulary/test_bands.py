from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import InputError, UnknownCodeError
from cuebook.vocabulary import get_age_band, get_tempo_band, load_vocabulary


@pytest.mark.parametrize(
    ("years", "slug"),
    [
        (3, "3-5"),
        (12, "9-12"),
        (13, "13-17"),
        (64, "40-64"),
        (65, "65-74"),
        (84, "75-84"),
        (85, "85+"),
        (103, "85+"),
    ],
)
def test_age_falls_into_its_band(years: int, slug: str) -> None:
    """Both ends of an age band belong to it, and 85 opens the last one."""
    band = get_age_band(years)
    assert band is not None
    assert band.slug == slug


def test_ages_over_89_share_one_band_with_85() -> None:
    """Ages over 89 are not told apart (US 45 CFR 164.514(b)(2), the Safe Harbor list)."""
    assert get_age_band(90) == get_age_band(85)


def test_younger_than_the_youngest_band_has_none() -> None:
    """A child of two has no band rather than a wrong one."""
    assert get_age_band(2) is None


@given(st.integers(min_value=3, max_value=120))
def test_every_age_from_three_has_exactly_one_band(years: int) -> None:
    """The age bands leave no gap and do not overlap."""
    holding = [
        band
        for band in load_vocabulary().entries("age_band")
        if band.low is not None
        and band.low <= years <= (band.high if band.high is not None else 999)
    ]
    assert holding == [get_age_band(years)]


@pytest.mark.parametrize(
    ("rate", "cycle", "slug"),
    [
        (
            100.0,
            "step",
            "step_brisk",
        ),  # 100 steps/min: about moderate effort (Tudor-Locke et al. 2018, from memory)
        (99.9, "step", "step_medium"),
        (
            130.0,
            "step",
            "step_fast",
        ),  # 130 steps/min: about vigorous effort (Tudor-Locke et al. 2018, from memory)
        (20.9, "stroke", "stroke_low"),
        (21.0, "stroke", "stroke_steady"),
        (400.0, "beat", "beat_very_fast"),
    ],
)
def test_rate_falls_into_the_band_of_its_cycle(rate: float, cycle: str, slug: str) -> None:
    """The low limit of a tempo band is included, the high one is not."""
    band = get_tempo_band(rate, cycle)
    assert band is not None
    assert band.slug == slug


@given(
    st.sampled_from(["step", "stride", "stroke", "beat", "repetition", "breath"]),
    st.floats(min_value=0.01, max_value=1000),
)
def test_every_rate_of_a_banded_cycle_has_exactly_one_band(cycle: str, rate: float) -> None:
    """The tempo bands of a cycle leave no gap and do not overlap."""
    bands = [band for band in load_vocabulary().entries("tempo_band") if band.cycle == cycle]
    holding = [b for b in bands if (b.low or 0.0) <= rate < (b.high or float("inf"))]
    assert holding == [get_tempo_band(rate, cycle)]


def test_a_cycle_without_bands_gives_none() -> None:
    """A turn has no bands; the number stands for itself."""
    assert get_tempo_band(30.0, "turn") is None


@pytest.mark.parametrize("rate", [0.0, -3.0, float("nan"), float("inf")])
def test_a_rate_that_is_no_positive_number_is_refused(rate: float) -> None:
    """Zero, negative, missing and infinite rates are refused with a reason."""
    with pytest.raises(InputError):
        get_tempo_band(rate, "step")


def test_an_unknown_cycle_names_the_nearest() -> None:
    """A mistyped cycle is an error that names what was probably meant."""
    with pytest.raises(UnknownCodeError) as caught:
        get_tempo_band(60.0, "steps")
    assert "step" in caught.value.hint
