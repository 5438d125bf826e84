from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import UnknownCodeError, UsageError
from cuebook.metrics.discrete import compute_sparc
from cuebook.metrics.engine import Around, measure_recording
from cuebook.metrics.registry import load_registry
from cuebook.metrics.settings import read_settings
from cuebook.metrics.values import Measurement, Recipe
from cuebook.recordings.reading import read_content
from cuebook.recordings.recording import Recording
from cuebook.vocabulary import load_vocabulary


def make_reach(
    unit: str = "m", *, scale: float = 1.0, turn: float = 0.0, shift: float = 0.0
) -> Recording:
    """Return a reach of 0.3 m in 1 s with rest at both ends, 100 Hz."""
    time_s = np.arange(0, 1.8, 0.01)
    tau = np.clip((time_s - 0.4) / 1.0, 0, 1)
    along = 0.3 * (10 * tau**3 - 15 * tau**4 + 6 * tau**5)
    x = scale * (along * math.cos(turn) + shift)
    y = scale * (along * math.sin(turn) - shift)
    suffix = f"_{unit}" if unit else ""
    rows = "\n".join(f"{t:.2f},{a:.9f},{b:.9f}" for t, a, b in zip(time_s, x, y, strict=True))
    text = f"time_s,hand_x{suffix},hand_y{suffix}\n{rows}\n"
    return read_content(text.encode(), "reach.csv")


def measure(recording: Recording, **given: object) -> dict[str, Measurement]:
    """Return the measurements by metric."""
    found = measure_recording(recording, "reaching", **given)  # type: ignore[arg-type]
    return {one.metric: one for one in found}


def test_every_metric_is_complete_and_leads_to_known_ones() -> None:
    """Watch partners and features exist; transforms and directions are known words."""
    registry, vocabulary = load_registry(), load_vocabulary()
    for entry in registry.entries:
        assert entry.better in {"higher", "lower", "target", "none"}
        assert entry.watch_better in {"higher", "lower", "either"}
        assert entry.transform in {"none", "log", "logit", "sqrt"}
        assert entry.resolution > 0
        assert all(registry.has(partner) for partner in entry.watch_partners)
        assert all(vocabulary.has("feature", feature) for feature in entry.features)


def test_every_metric_of_a_feature_is_in_the_registry() -> None:
    """The vocabulary names no metric that is not there."""
    for feature in load_vocabulary().entries("feature"):
        assert all(load_registry().has(metric) for metric in feature.related)


def test_an_old_id_leads_to_its_metric_and_an_unknown_one_names_the_nearest() -> None:
    """Aliases are followed; slips are answered."""
    assert load_registry().get("timed_up_and_go_s").metric == "tug_s"
    with pytest.raises(UnknownCodeError) as caught:
        load_registry().get("spark")
    assert "sparc" in caught.value.hint


def test_a_reach_is_measured_whole() -> None:
    """Time, path, peak and straightness of a minimum-jerk reach (Flash & Hogan 1985)."""
    values = {metric: one.value for metric, one in measure(make_reach()).items()}
    assert values["path_length_cm"] == pytest.approx(30.0, rel=0.01)
    assert values["peak_speed_m_s"] == pytest.approx(0.3 * 1.875, rel=0.02)
    assert values["movement_time_s"] == pytest.approx(math.sqrt(1 - math.sqrt(0.05)), abs=0.03)
    assert values["straightness"] == pytest.approx(1.0, abs=1e-6)
    assert values["velocity_peaks"] == 1


@given(st.floats(-3, 3), st.floats(-0.5, 0.5))
def test_where_and_whither_do_not_matter(turn: float, shift: float) -> None:
    """Rotation and shift leave every measure of a reach as it is."""
    base, moved = measure(make_reach()), measure(make_reach(turn=turn, shift=shift))
    for metric, one in base.items():
        assert moved[metric].value == pytest.approx(one.value, rel=1e-4, abs=1e-4)


@pytest.mark.parametrize(("unit", "scale"), [("cm", 100.0), ("mm", 1000.0)])
def test_the_unit_of_the_file_does_not_matter(unit: str, scale: float) -> None:
    """The same reach in other units reads the same."""
    base, other = measure(make_reach()), measure(make_reach(unit, scale=scale))
    for metric, one in base.items():
        assert other[metric].value == pytest.approx(one.value, rel=1e-6, abs=1e-6)


def test_without_a_unit_only_unitless_measures_are_given() -> None:
    """Lengths and speeds are missing with the reason; smoothness is not."""
    found = measure(make_reach(""))
    assert found["path_length_cm"].reason == "unit_unknown"
    assert found["peak_speed_m_s"].value is None
    assert found["sparc"].value == pytest.approx(-1.41, abs=0.03)


@given(st.integers(40, 200))
def test_sparc_is_the_same_backwards(n: int) -> None:
    """Spectral arc length does not know the direction of time."""
    rng = np.random.default_rng(n)
    speed = np.abs(np.convolve(rng.normal(size=n), np.hanning(15), mode="same")) + 0.01
    assert compute_sparc(speed[::-1].copy(), 100.0) == pytest.approx(compute_sparc(speed, 100.0))


def test_without_a_task_the_family_is_assumed_and_flagged() -> None:
    """A point with rest at both ends is taken for one movement, and that is said."""
    measured = measure_recording(make_reach())
    assert all("task_assumed" in one.flags for one in measured)


def test_a_via_point_brings_its_two_measures() -> None:
    """Via measures appear when a via point is given, and only then."""
    assert "via_error_cm" not in measure(make_reach())
    found = measure(make_reach(), around=Around(points={"via": (0.15, 0.02)}))
    assert found["via_error_cm"].value == pytest.approx(2.0, abs=0.01)
    assert found["via_error_cm"].recipe["via"] == [0.15, 0.02]


@pytest.mark.parametrize(
    ("settings", "words"),
    [
        ({"lowpas_hz": "6"}, "lowpas_hz"),
        ({"ellipse": "round"}, "not known"),
        ({"onset": "2"}, "share"),
        ({"padlevel": "4.5"}, "whole number"),
        ({"discard_s": "-1"}, "at least 0"),
    ],
)
def test_settings_are_checked_before_anything_runs(settings: dict[str, str], words: str) -> None:
    """An unknown name or an impossible value is refused."""
    with pytest.raises(UsageError, match=words):
        read_settings(settings)


def test_a_metric_that_is_only_typed_says_so() -> None:
    """Asking a recording for a stopwatch value is answered."""
    with pytest.raises(UsageError, match="not computed from recordings"):
        measure_recording(make_reach(), metrics=("tug_s",))


def test_equal_choices_make_equal_recipes() -> None:
    """The order in which choices were made does not matter; one choice less does."""
    one = Recipe({"lowpass_hz": 6.0, "onset": 0.05})
    assert one.digest == Recipe({"onset": 0.05, "lowpass_hz": 6.0}).digest
    assert one.digest != Recipe({"lowpass_hz": 6.0}).digest
