"""Names of time zones, so that a stored moment keeps its calendar day; light to load."""

from __future__ import annotations

import os
import re
from datetime import UTC, datetime, timedelta, timezone, tzinfo
from pathlib import Path
from zoneinfo import ZoneInfo

_OFFSET = re.compile(r"([+-])(\d\d):(\d\d)")
_LOCAL_LINK = Path("/etc/localtime")


def name_zone(moment: datetime) -> str:
    """Return the zone of an aware moment: its name in the tz database, else its offset.

    A moment that only knows its offset, as the system's clock gives it, gets the name of this
    machine's zone if that had the same offset then.
    """
    zone = moment.tzinfo
    key = getattr(zone, "key", None)
    if key:
        return str(key)
    if zone is UTC:
        return "UTC"
    local = _name_local_zone()
    if local is not None:
        there = _load(local)
        if there is not None and moment.astimezone(there).utcoffset() == moment.utcoffset():
            return local
    return _format_offset(moment)


def find_zone(name: str) -> tzinfo:
    """Return the zone of a stored name; UTC if this machine does not know it."""
    found = _OFFSET.fullmatch(name)
    if found is not None:
        sign, hours, minutes = found.groups()
        offset = timedelta(hours=int(hours), minutes=int(minutes))
        return timezone(-offset if sign == "-" else offset)
    return _load(name) or UTC


def _format_offset(moment: datetime) -> str:
    offset = moment.utcoffset() or timedelta()
    minutes = round(abs(offset).total_seconds() / 60)
    sign = "-" if offset < timedelta() else "+"
    return f"{sign}{minutes // 60:02d}:{minutes % 60:02d}"


def _name_local_zone() -> str | None:
    given = os.environ.get("TZ", "").lstrip(":")
    if given:
        return given
    parts = _LOCAL_LINK.resolve().parts
    if "zoneinfo" in parts:
        return "/".join(parts[parts.index("zoneinfo") + 1 :])
    return None


def _load(name: str) -> ZoneInfo | None:
    try:
        return ZoneInfo(name)
    except (ValueError, OSError, LookupError):
        # Unknown here, not a name at all, or a file that is no zone.
        return None
