from __future__ import annotations

import json
import sqlite3
from pathlib import Path

import numpy as np
import pytest

from cuebook.cli.main import run
from cuebook.errors import InputError, NeedsAnswerError
from cuebook.jobs.log_entries import BlockEntry
from cuebook.jobs.people import NewLearner, add_learner
from cuebook.jobs.take_in import TakenIn, take_in
from cuebook.recordings.recording import ReadingOptions

LEARNER = "walnut-kite"


def write_reach(path: Path, seconds: float = 1.0, distance_m: float = 0.3) -> Path:
    """Write a minimum-jerk reach with rest at both ends, 100 Hz."""
    time_s = np.arange(0, seconds + 0.8, 0.01)
    tau = np.clip((time_s - 0.4) / seconds, 0, 1)
    x = distance_m * (10 * tau**3 - 15 * tau**4 + 6 * tau**5)
    rows = [f"{t:.2f},{at:.6f},0.0" for t, at in zip(time_s, x, strict=True)]
    path.write_text("\n".join(["time_s,hand_x_m,hand_y_m", *rows, ""]), encoding="ascii")
    return path


@pytest.fixture
def library(tmp_path: Path) -> Path:
    """Make a library with two learners."""
    folder = tmp_path / "library"
    add_learner(folder, NewLearner(code=LEARNER))
    add_learner(folder, NewLearner(code="button-lake"))
    return folder


def import_reach(library: Path, paths: list[Path], **given: object) -> TakenIn:
    """Import files as a baseline of reaching."""
    options = given.pop("options", None)
    entry = BlockEntry(
        task="reaching", learner=str(given.pop("learner", LEARNER)), phase="baseline"
    )
    return take_in(library, paths, entry, options=options, **given)  # type: ignore[arg-type]


def count_rows(library: Path) -> dict[str, int]:
    """Return how many rows each table holds."""
    connection = sqlite3.connect(library / "cuebook.sqlite3")
    try:
        names = [row[0] for row in connection.execute("SELECT name FROM sqlite_schema")]
        tables = [
            row[0]
            for row in connection.execute("SELECT name FROM sqlite_schema WHERE type = 'table'")
        ]
        assert names
        return {
            table: connection.execute(f'SELECT COUNT(*) FROM "{table}"').fetchone()[0]  # noqa: S608
            for table in tables
        }
    finally:
        connection.close()


def test_a_second_identical_import_adds_nothing_and_says_so(library: Path, tmp_path: Path) -> None:
    """The same bytes for the same learner and block are recognised."""
    files = [write_reach(tmp_path / f"{n}.csv", 1 + n / 10) for n in range(3)]
    first = import_reach(library, files)
    rows = count_rows(library)
    second = import_reach(library, files)
    assert (first.n_added, second.n_added, second.n_known) == (3, 0, 3)
    assert count_rows(library) == rows
    assert "nothing added" in " ".join(second.lines)


def test_the_same_bytes_for_another_learner_are_refused_with_the_place(
    library: Path, tmp_path: Path
) -> None:
    """A recording belongs to one learner unless the user insists."""
    file = write_reach(tmp_path / "a.csv")
    import_reach(library, [file])
    with pytest.raises(InputError, match=LEARNER):
        import_reach(library, [file], learner="button-lake")
    assert import_reach(library, [file], learner="button-lake", again=True).n_added == 1


def test_another_reading_rule_gives_a_new_reading_of_the_same_trial(
    library: Path, tmp_path: Path
) -> None:
    """The old reading stays in history, and only the new one counts."""
    file = write_reach(tmp_path / "a.csv")
    import_reach(library, [file])
    anew = import_reach(library, [file], options=ReadingOptions(columns={"time": "1", "x": "2"}))
    assert (anew.n_added, anew.n_read_anew) == (0, 1)
    rows = count_rows(library)
    assert (rows["trial"], rows["recording"]) == (1, 2)


def test_the_original_is_kept_unchanged(library: Path, tmp_path: Path) -> None:
    """The bytes of the file lie in the library under their hash."""
    file = write_reach(tmp_path / "a.csv")
    import_reach(library, [file])
    kept = [path for path in (library / "originals").rglob("*") if path.is_file()]
    assert [path.read_bytes() for path in kept] == [file.read_bytes()]


def test_one_bad_file_among_several_stores_nothing(library: Path, tmp_path: Path) -> None:
    """An import is all or nothing."""
    good = write_reach(tmp_path / "good.csv")
    bad = tmp_path / "bad.csv"
    bad.write_text("time_s,hand_x_m\n0.00,a\n0.01,b\n0.02,0.1\n0.03,0.2\n", encoding="ascii")
    rows = count_rows(library)
    with pytest.raises((InputError, NeedsAnswerError)):
        import_reach(library, [good, bad])
    assert count_rows(library) == rows


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (b"", 3),
        (b"\x00\x01\x02\x03" * 50, 3),
        (b"x_m,y_m\n0.1,0.2\n0.2,0.3\n0.3,0.4\n", 5),
        (b"time_s,x_m,y_m\n0.00,0,0\n0.02,0,0\n0.01,0,0\n0.03,0,0\n", 3),
        (b"time_s,x_m,y_m\n0.00,0,0\n0.01,0,0\n0.02,0,0\n0.03,0,0\n", 3),
        (b"time_s,x_m,y_m\n0.00,0,0\n0.01,1,0\n0.02,oops,0\n0.03,2,0\n", 3),
    ],
    ids=["empty", "binary", "no time", "time goes back", "all zero", "text"],
)
def test_a_bad_file_gives_one_line_its_exit_code_and_stores_nothing(
    library: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    content: bytes,
    code: int,
) -> None:
    """Whatever is wrong with a file, the user gets one clear line and no traceback."""
    file = tmp_path / "bad.csv"
    file.write_bytes(content)
    rows = count_rows(library)
    given = ["import", str(file), "--learner", LEARNER, "--task", "reaching"]
    assert run([*given, "--phase", "baseline", "--library", str(library)]) == code
    said = capsys.readouterr()
    assert len(said.err.strip().splitlines()) == 1
    assert "Traceback" not in said.err
    assert said.out == ""
    assert count_rows(library) == rows


@pytest.mark.parametrize(
    ("arguments", "code", "named"),
    [
        (["--learner", "walnut-kit", "--task", "reaching"], 4, "walnut-kite"),
        (["--learner", LEARNER, "--task", "reachin"], 4, "reaching"),
        (["--learner", LEARNER, "--task", "reaching", "--set", "lowpas=6"], 2, "lowpass_hz"),
    ],
)
def test_unknown_words_name_the_nearest(
    library: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    arguments: list[str],
    code: int,
    named: str,
) -> None:
    """An unknown learner, task or setting names what may have been meant."""
    file = write_reach(tmp_path / "a.csv")
    given = ["import", str(file), *arguments, "--phase", "baseline", "--library", str(library)]
    assert run([*given, "--json"]) == code
    error = json.loads(capsys.readouterr().err)
    assert (error["format"], error["code"]) == ("cuebook.error/1", code)
    assert named in error["hint"]


def test_preview_shows_what_is_understood_and_stores_nothing(
    library: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A preview names time, rate and values, and leaves the library as it was."""
    file = write_reach(tmp_path / "a.csv")
    rows = count_rows(library)
    given = ["import", str(file), "--learner", LEARNER, "--task", "reaching", "--phase", "baseline"]
    assert run([*given, "--library", str(library), "--preview"]) == 0
    said = capsys.readouterr().out
    assert "100 Hz" in said
    assert "Nothing was stored." in said
    assert count_rows(library) == rows
