from __future__ import annotations

import random
import subprocess
import sys
from pathlib import Path

import pytest
from support.screens import paste, press, read_screen, settle
from textual.binding import Binding
from textual.theme import Theme
from textual.widgets import Input

from cuebook.tui.app import CuebookApp
from cuebook.tui.colours import DARK, LIGHT
from cuebook.tui.find_screen import FindScreen
from cuebook.tui.group_box import GroupBox
from cuebook.tui.key_list import list_keys
from cuebook.tui.log_screen import LogScreen
from cuebook.tui.measure_box import MeasureBox, MembersBox
from cuebook.tui.pick_box import PickBox
from cuebook.tui.practice_box import PracticeBox
from cuebook.tui.review_screen import ReviewScreen

RANDOM_KEYS = [
    *(f"f{number}" for number in range(1, 10)),
    *"123wcospatdnlmrexkzbv5",
    *("up", "down", "pageup", "pagedown", "enter", "enter", "escape", "escape", "space", "tab"),
]
HEAVY = ("scipy", "pandas", "numpy", "sqlmodel", "sqlalchemy", "alembic", "pyarrow")
SCREENS = (FindScreen, LogScreen, ReviewScreen)
BOXES = (PickBox, GroupBox, MeasureBox, MembersBox, PracticeBox)
TAKEN_ELSEWHERE = {f"ctrl+{letter}" for letter in "himjsqbaz"}
"""Backspace, Tab and Enter, flow control, and the prefix keys of terminal multiplexers."""


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


@pytest.mark.parametrize("size", [(80, 24), (60, 20), (120, 40)])
@pytest.mark.parametrize("key", ["f2", "f3", "f4"])
async def test_every_place_is_named_on_every_screen(
    tmp_path: Path, key: str, size: tuple[int, int]
) -> None:
    """Wherever one is, the places and the way out are in the first line, and a status below."""
    app = CuebookApp(tmp_path)
    async with app.run_test(size=size) as pilot:
        await press(pilot, key)
        lines = read_screen(app).split("\n")
    for word in ("Find", "Log", "What shifted", "F1 Keys", "F10 Leave"):
        assert word in lines[0]
    assert lines[0].count("[") == 1
    assert lines[-1].strip()


async def test_places_are_reached_without_function_keys(tmp_path: Path) -> None:
    """Once the field is left with Escape, 1 2 3 go to the places and ? lists the keys."""
    app = CuebookApp(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "escape", "2")
        assert "[Log]" in read_screen(app)
        await press(pilot, "3")
        assert "[What shifted]" in read_screen(app)
        await press(pilot, "1")
        await paste(pilot, "hm 2")
        assert "Problem: hm 2" in read_screen(app)
        await press(pilot, "escape", "question_mark")
        assert "Take the cue into Log" in read_screen(app)


@pytest.mark.parametrize("screen", SCREENS)
def test_the_list_of_keys_holds_every_key_of_the_screen(screen: type[FindScreen]) -> None:
    """What a key does is said once, from the bindings themselves."""
    told = "\n".join(list_keys(CuebookApp, screen))
    for one in (*screen.__dict__["BINDINGS"], *CuebookApp.BINDINGS):
        assert isinstance(one, Binding)
        assert one.description in told


def test_no_key_is_bound_that_terminals_keep_for_themselves() -> None:
    """Keys that mean backspace, Tab or Enter, stop the line, or go to a multiplexer are left."""
    bound = [
        key
        for where in (CuebookApp, *SCREENS, *BOXES)
        for one in where.__dict__.get("BINDINGS", ())
        for key in one.key.split(",")
    ]
    assert not TAKEN_ELSEWHERE & set(bound)
    assert not [key for key in bound if key.startswith("ctrl+")]


async def test_no_cursor_blinks(tmp_path: Path) -> None:
    """Nothing on any screen or in any box blinks."""
    app = CuebookApp(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        fields = list(app.screen.query(Input))
        for box in (
            PickBox("Which?", []),
            GroupBox(["heron-lamp"]),
            MeasureBox("Before", None),
            MembersBox("Before", None, ("heron-lamp",), frozenset()),
        ):
            app.push_screen(box)
            await pilot.pause()
            fields += app.screen.query(Input)
            await press(pilot, "escape")
        assert len(fields) == 5
        assert not [field for field in fields if field.cursor_blink]


async def test_without_colour_the_words_are_the_same(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With NO_COLOR, in the dark and in the light, signs and words say everything."""
    shown = []
    for no_color, turns in (("", 0), ("1", 0), ("", 1)):
        if no_color:
            monkeypatch.setenv("NO_COLOR", no_color)
        else:
            monkeypatch.delenv("NO_COLOR", raising=False)
        app = CuebookApp(tmp_path)
        async with app.run_test(size=(80, 24)) as pilot:
            await paste(pilot, "tiny steps when walking")
            await press(pilot, *["f8"] * turns, "down")
            assert app.theme == (LIGHT if turns else DARK).name
            shown.append(read_screen(app))
    assert len(set(shown)) == 1
    assert "> ! Freezing" in shown[0]


def _measure_luminance(colour: str) -> float:
    """Return the relative luminance of WCAG 2.1 (definition "relative luminance")."""
    parts = [int(colour[at : at + 2], 16) / 255 for at in (1, 3, 5)]
    linear = [
        part / 12.92 if part <= 0.03928 else ((part + 0.055) / 1.055) ** 2.4 for part in parts
    ]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


@pytest.mark.parametrize("theme", [DARK, LIGHT])
def test_text_stands_out_from_its_ground(theme: Theme) -> None:
    """Words reach the contrast of 4.5 to 1 of WCAG 2.1, success criterion 1.4.3."""
    for front in (theme.foreground, theme.primary, theme.warning, theme.accent):
        for ground in (theme.background, theme.surface):
            assert front is not None
            assert ground is not None
            low, high = sorted((_measure_luminance(front), _measure_luminance(ground)))
            assert (high + 0.05) / (low + 0.05) >= 4.5


@pytest.mark.parametrize("seed", range(2))
async def test_random_keys_never_crash_and_never_leave_the_screen_blank(
    library: Path, seed: int
) -> None:
    """Whatever is pressed, the first line still names the places or a box says how to close."""
    draw = random.Random(seed)  # noqa: S311 - keys, not secrets
    app = CuebookApp(library)
    async with app.run_test(size=(60, 20) if seed % 2 else (80, 24)) as pilot:
        await paste(pilot, "tiny steps when walking")
        for _ in range(10):
            await press(pilot, *draw.choices(RANDOM_KEYS, k=8))
            shown = read_screen(app)
            assert "F10 Leave" in shown or "scape closes" in shown or "Enter  not asked" in shown


async def test_a_fault_leaves_one_plain_sentence(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """If the program itself fails it leaves without a traceback and without what was typed."""
    app = CuebookApp(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settle(pilot)
        app._exception = ValueError("secret words")
        app._fatal_error()
        app._exception = None
    said = " ".join(capsys.readouterr().err.split())
    assert said.startswith("Cuebook met a fault of its own (ValueError). What was said")
    assert "secret" not in said
