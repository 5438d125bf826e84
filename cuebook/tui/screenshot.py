"""A picture of What shifted, made by the app itself: ``python -m cuebook.tui.screenshot``."""

from __future__ import annotations

import argparse
import asyncio
import re
from pathlib import Path

from cuebook.tui.app import CuebookApp

SIZE = (100, 40)


async def take_picture(location: Path, question: int = 0) -> str:
    """Return the screen What shifted as SVG, with one of its questions open."""
    app = CuebookApp(location)
    async with app.run_test(size=SIZE) as pilot:
        await pilot.press("f4")
        for _ in range(2):
            await app.workers.wait_for_complete()
            await pilot.pause()
        await pilot.press(*["down"] * question, "enter")
        for _ in range(3):
            await app.workers.wait_for_complete()
            await pilot.pause()
        return make_self_contained(app.export_screenshot(title="Cuebook: what shifted"))


def make_self_contained(svg: str) -> str:
    """Return a picture that asks no outside host for a font: the reader's own will do."""
    svg = re.sub(r"@font-face\s*{[^}]*}", "", svg)
    svg = re.sub(r"<!--.*?-->", "", svg, flags=re.DOTALL)
    return re.sub(r"font-family:\s*Fira Code[^;]*;", "font-family: monospace;", svg)


def main() -> None:
    """Write the picture of a library's first question into a file."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("library", type=Path)
    parser.add_argument("picture", type=Path)
    parser.add_argument("--question", type=int, default=0, help="Its place in the list, from 0.")
    given = parser.parse_args()
    svg = asyncio.run(take_picture(given.library, given.question))
    given.picture.write_text(svg, encoding="utf-8")


if __name__ == "__main__":
    main()
