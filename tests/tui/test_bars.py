from __future__ import annotations

from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from cuebook.tui.bars import EFFECT, INNER, OUTER, ZERO, draw_axis, draw_bar, make_scale

ENDS = st.lists(st.floats(-1e6, 1e6, allow_nan=False), min_size=5, max_size=5, unique=True).map(
    sorted
)


def make_cue(ends: list[float]) -> dict[str, Any]:
    """Return a cue with an interval inside an interval."""
    names = ("low95", "low80", "effect", "high80", "high95")
    return dict(zip(names, ends, strict=True))


def test_a_bar_shows_effect_intervals_and_the_line_to_beat() -> None:
    """The effect lies inside its thick 80 % part, that inside the thin 95 % part."""
    cue = make_cue([0.25, 0.5, 1.0, 1.5, 2.0])
    bar = draw_bar(cue, make_scale([cue], 41), worthwhile=0.1)
    assert bar.index(ZERO) < bar.index(OUTER) < bar.index(INNER) < bar.index(EFFECT)
    assert bar.rindex(EFFECT) < bar.rindex(INNER) < bar.rindex(OUTER)


@given(cues=st.lists(ENDS.map(make_cue), min_size=1, max_size=6), width=st.integers(8, 90))
def test_all_rows_share_one_scale(cues: list[dict[str, Any]], width: int) -> None:
    """Every row is as wide as asked, and a larger effect never stands further left."""
    scale = make_scale(cues, width)
    bars = [draw_bar(cue, scale, worthwhile=None) for cue in cues]
    assert {len(bar) for bar in bars} == {width}
    order = sorted(range(len(cues)), key=lambda at: cues[at]["effect"])
    places = [bars[at].index(EFFECT) for at in order]
    assert places == sorted(places)


@given(cue=ENDS.map(make_cue), width=st.integers(34, 90))
def test_the_axis_names_the_line_to_beat_at_its_own_cell(cue: dict[str, Any], width: int) -> None:
    """The mark of 0 stands below that of the bars; an end is named where there is room."""
    scale = make_scale([cue], width)
    axis = draw_axis(scale, "−0.5", "practice alone", "+1.5")
    assert len(axis) == width
    assert axis.index(ZERO) == scale.place(0.0)
    assert "practice alone" in axis


def test_the_axis_names_both_ends_where_there_is_room() -> None:
    """With 0 in the middle of a wide row all three labels are there."""
    axis = draw_axis(make_scale([make_cue([-2, -1, 0, 1, 2])], 60), "−2.1", "mean", "+2.1")
    assert axis.split() == ["−2.1", ZERO, "mean", "+2.1"]
