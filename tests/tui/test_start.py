from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from support.screens import read_screen

from cuebook.tui.app import CuebookApp
from cuebook.tui.bars import draw_bar, make_scale

HEAVY = ("scipy", "pandas", "numpy", "sqlmodel", "sqlalchemy", "alembic", "pyarrow")


def test_the_first_frame_loads_no_heavy_library() -> None:
    """The first frame goes through the reading path only."""
    script = (
        "import asyncio, sys, tempfile\n"
        "from cuebook.tui.app import CuebookApp\n"
        "async def main():\n"
        "    app = CuebookApp(tempfile.mkdtemp())\n"
        "    async with app.run_test(size=(80, 24)) as pilot:\n"
        "        await pilot.pause()\n"
        f"        print(sorted(set({HEAVY!r}) & set(sys.modules)))\n"
        "asyncio.run(main())\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert shown.stdout.strip() == "[]"


@pytest.mark.parametrize("key", ["f2", "f3", "f4"])
async def test_every_place_is_named_on_every_screen(tmp_path: Path, key: str) -> None:
    """Wherever one is, the three places and the way out are in the first line."""
    app = CuebookApp(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.press(key)
        await pilot.pause()
        first = read_screen(app).split("\n")[0]
    for word in ("Find", "Log", "What shifted", "F1 Keys", "F10 Leave"):
        assert word in first


def test_a_bar_shows_effect_intervals_and_the_line_to_beat() -> None:
    """The effect lies inside its thick 80 % part, that inside the thin 95 % part."""
    cue = {"effect": 1.0, "low80": 0.5, "high80": 1.5, "low95": 0.25, "high95": 2.0}
    bar = draw_bar(cue, make_scale([cue], 41), worthwhile=0.1)
    assert bar.index("│") < bar.index("─") < bar.index("━") < bar.index("●")
    assert bar.rindex("●") < bar.rindex("━") < bar.rindex("─")
    assert len(bar) == 41
