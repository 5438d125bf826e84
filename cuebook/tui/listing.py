"""A list whose row under the cursor has a sign, and whose cursor the screen moves.

It leans on two inner methods of the screen library's list, as that library's own list of check
boxes does; the version is pinned, and what depends on it stays in this file.
"""

from __future__ import annotations

from rich.segment import Segment
from textual.strip import Strip
from textual.widgets import OptionList

SIGN = "> "


class Listing(OptionList, can_focus=False):
    """Takes no keys itself, so that they stay with the field or the screen."""

    def _get_left_gutter_width(self) -> int:
        """Return the cells that the sign takes."""
        return len(SIGN)

    def render_line(self, y: int) -> Strip:
        """Return a line with the sign before the first line of the row under the cursor."""
        strip = super().render_line(y)
        style = next(iter(strip)).style if len(strip) else None
        sign = SIGN if self._begins_cursor_row(self.scroll_offset.y + y) else " " * len(SIGN)
        return Strip([Segment(sign, style), *strip])

    def _begins_cursor_row(self, line: int) -> bool:
        if not 0 <= line < len(self._lines):
            return False
        index, offset = self._lines[line]
        return index == self.highlighted and offset == 0
