from __future__ import annotations

from datetime import UTC, datetime, timedelta, timezone
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import InputError
from cuebook.store.moments import format_moment, parse_moment
from cuebook.store.stamps import make_stamp
from cuebook.store.zones import find_zone, name_zone


def test_a_zone_of_the_database_keeps_its_name() -> None:
    """A named zone is stored by name, so that its clock changes stay known."""
    london = ZoneInfo("Europe/London")
    winter = datetime(2026, 1, 5, 10, tzinfo=london)
    assert name_zone(winter) == "Europe/London"
    assert find_zone("Europe/London") == london
    assert name_zone(datetime(2026, 1, 5, tzinfo=UTC)) == "UTC"


def test_an_offset_gets_this_machines_zone_only_if_it_fits(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """A bare +02:00 in summer is this machine's zone in Helsinki less an hour, not London's."""
    summer = datetime(2026, 7, 1, 10, tzinfo=timezone(timedelta(hours=2)))
    monkeypatch.setenv("TZ", "Europe/Vienna")
    assert name_zone(summer) == "Europe/Vienna"
    monkeypatch.setenv("TZ", "Europe/London")
    assert name_zone(summer) == "+02:00"
    assert summer.astimezone(find_zone("+02:00")).utcoffset() == timedelta(hours=2)
    half = datetime(2026, 7, 1, tzinfo=timezone(-timedelta(hours=3, minutes=30)))
    assert name_zone(half) == "-03:30"
    assert half.astimezone(find_zone("-03:30")).utcoffset() == -timedelta(hours=3, minutes=30)


def test_an_unknown_zone_is_read_as_utc() -> None:
    """A name this machine does not know loses the local day, never the moment."""
    assert find_zone("Nowhere/Atlantis") is UTC
    assert find_zone("../../etc/passwd") is UTC


@given(st.datetimes(timezones=st.timezones()))
def test_a_moment_comes_back_the_same(moment: datetime) -> None:
    """Any moment with a zone survives storing, as the same instant."""
    try:
        text = format_moment(moment)
    except InputError:
        assert moment.year in {1, 9999}
        return
    assert parse_moment(text) == moment.astimezone(UTC)  # compared in UTC: folds are never equal
    assert len(text) == len("2026-03-02T09:00:00.000000Z")


@given(st.lists(st.datetimes(timezones=st.just(UTC)), min_size=2, max_size=5))
def test_stored_moments_sort_by_time(moments: list[datetime]) -> None:
    """Text order is time order, which every query relies on."""
    assert [parse_moment(text) for text in sorted(map(format_moment, moments))] == sorted(moments)


def test_a_time_without_a_zone_is_refused() -> None:
    """A naive time names no moment: it is refused before anything is stored."""
    with pytest.raises(InputError, match="has no zone"):
        make_stamp(datetime(2026, 3, 2, 9))  # noqa: DTZ001 - the point of the test
