from __future__ import annotations

from pathlib import Path

import pytest
from support.screens import press, read_screen, settle, type_text

from cuebook.tui.app import CuebookApp

SENTENCE = "Takes tiny steps and shuffles down the corridor"


@pytest.mark.parametrize("size", [(80, 24), (60, 20), (120, 40)])
async def test_find_log_and_see_what_shifted_by_keys_alone(
    library: Path, size: tuple[int, int]
) -> None:
    """A cue is found, logged with three values before and after, and shown with its change."""
    app = CuebookApp(library)
    async with app.run_test(size=size) as pilot:
        await type_text(pilot, SENTENCE)
        found = read_screen(app)
        assert "Stride on as if from one paving slab" in found
        assert found.index("! ") < found.index("Stride on as if")
        await press(pilot, "down", "enter")
        assert "[Log]" in read_screen(app)
        await press(pilot, "f5")
        await type_text(pilot, "heron")
        await press(pilot, "enter")
        assert "Take the opening measure now" in read_screen(app)
        await press(pilot, "o")
        await type_text(pilot, "41 43 42")
        await press(pilot, "enter")
        await press(pilot, "c", "3", "s", "enter")
        await press(pilot, "p")
        await type_text(pilot, "47 46 49")
        await press(pilot, "enter")
        assert "Stored for heron-lamp." in read_screen(app)
        await press(pilot, "f4")
        await press(pilot, "enter")
        await settle(pilot)
        answer = str(app.screen.query_one("#answer").render())
        assert "Recorded, cannot rank yet" in answer
        assert "41 43 42 before, 47 46 49 after, change +5.33 cm" in answer
        assert "too few uses to rank" in answer


async def test_an_empty_library_opens_and_says_what_to_do(tmp_path: Path) -> None:
    """The first start works without a library and names the next key."""
    app = CuebookApp(tmp_path / "nothing")
    async with app.run_test(size=(80, 24)) as pilot:
        assert "F5: for whom" in read_screen(app)
        await press(pilot, "f4")
        assert "Nothing is measured yet" in read_screen(app)
        await press(pilot, "f1")
        assert "F10       Leave" in read_screen(app)
