"""Who entered a row, when it happened and when it was entered."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from cuebook.store.moments import require_zone
from cuebook.store.zones import name_zone

LOCAL_STAFF = "local"
"""Code of the only staff member of a library on one machine."""


@dataclass(frozen=True, slots=True)
class Stamp:
    """When something happened, when it was entered, and by whom."""

    occurred_at: datetime
    occurred_zone: str
    entered_at: datetime
    entered_by: str = LOCAL_STAFF

    def as_columns(self) -> dict[str, Any]:
        """Return the columns every entered row has."""
        return {
            "occurred_at": self.occurred_at,
            "occurred_zone": self.occurred_zone,
            "entered_at": self.entered_at,
            "entered_by": self.entered_by,
        }


def make_stamp(
    occurred_at: datetime | None = None,
    *,
    entered_at: datetime | None = None,
    entered_by: str = LOCAL_STAFF,
) -> Stamp:
    """Return a stamp; without a time it happened now."""
    now = entered_at or datetime.now(UTC)
    moment = require_zone(occurred_at or now.astimezone())
    return Stamp(moment, name_zone(moment), now, entered_by)
