"""``cuebook review --table`` as a person or a script meets it."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

import pytest
from support.simulated_libraries import Library, Scenario, simulate_library

from cuebook.cli.main import run
from cuebook.evidence.preparation import prepare_uses
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.ranking import rank_cues
from cuebook.evidence.ranking_document import ranking_to_document
from cuebook.practice.changes import AttemptSet

SMALL = Scenario(n_cues=8, n_learners=12, n_uses=240)
TABLE_KEYS = [
    "format",
    "metric",
    "unit",
    "better",
    "transform",
    "contrast",
    "n_uses",
    "n_learners",
    "method",
    "engine",
    "evidence_revision",
    "reference",
    "practice_alone",
    "worthwhile",
    "mdc95_one_learner",
    "cues",
    "variances",
    "counts",
    "notes",
    "refused",
]
CUE_KEYS = [
    "cue",
    "kind",
    "uses",
    "learners",
    "effect",
    "effect_display",
    "low80",
    "high80",
    "low95",
    "high95",
    "p_better",
    "p_worthwhile",
    "p_next_learner",
    "rank",
    "rank_low90",
    "rank_high90",
    "p_best",
    "verdict",
    "grade",
    "more_uses",
    "stopped",
    "no_after",
    "harms",
    "watch",
]


@pytest.fixture(scope="module")
def simulated() -> Library:
    """Return a small library with known effects."""
    return simulate_library(11, SMALL)


@pytest.fixture(scope="module")
def table(simulated: Library, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the same library as a table of uses."""
    path = tmp_path_factory.mktemp("table") / "uses.csv"
    with path.open("w", newline="", encoding="utf-8") as stream:
        writer = csv.writer(stream)
        writer.writerow(
            [
                "cue",
                "learner",
                "before",
                "after",
                "n_before",
                "n_after",
                "sd_before",
                "sd_after",
                "session",
                "order",
                "kind",
                "chosen",
            ]
        )
        for change in simulated.changes:
            use = change.use
            writer.writerow(
                [
                    use.cue or "",
                    use.learner,
                    repr(change.before.mean),
                    repr(change.after.mean),
                    change.before.n,
                    change.after.n,
                    write_spread(change.before),
                    write_spread(change.after),
                    use.t,
                    use.k,
                    use.kind or "",
                    use.chosen,
                ]
            )
    return path


def write_spread(one: AttemptSet) -> str:
    """Return the SD of a set; empty for a single attempt."""
    return repr((one.sum_of_squares / (one.n - 1)) ** 0.5) if one.n > 1 else ""


def test_a_table_ranks_as_its_changes_do(
    simulated: Library, table: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Through the table or directly, effects, intervals and verdicts are the same."""
    assert run(["review", "--table", str(table), "--better", "higher", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    direct: dict[str, Any] = ranking_to_document(
        rank_cues(
            prepare_uses(simulated.changes, contrast="immediate"),
            ReviewQuestion(metric="simulated"),
        )
    )
    lines = document["cues"]
    assert [line["cue"] for line in lines] == [cue["cue"] for cue in direct["cues"]]
    for line, cue in zip(lines, direct["cues"], strict=True):
        for key in ("effect", "low95", "high95", "p_better", "p_worthwhile"):
            assert line[key] == pytest.approx(cue[key], abs=1e-6)
        assert line["verdict"] == cue["verdict"]
    assert document["n_uses"] == len(simulated.changes)
    assert document["n_learners"] == SMALL.n_learners


def test_the_document_has_every_promised_key(
    table: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Scripts rely on these keys of a review and of each of its cues."""
    arguments = ["--better", "lower", "--unit", "s", "--worthwhile", "0.2", "--allowance", "0"]
    assert run(["review", "--table", str(table), *arguments, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["format"] == "cuebook.review/1"
    assert [key for key in TABLE_KEYS if key not in document] == []
    assert [key for key in CUE_KEYS if key not in document["cues"][0]] == []
    assert set(document["variances"]) >= {"residual", "cue", "learner", "cue_by_learner"}
    assert (document["unit"], document["better"], document["worthwhile"]) == ("s", "lower", 0.2)


def test_turning_the_direction_turns_the_effects(
    table: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Lower is better: each effect changes its sign and the last cue becomes the first."""
    found = {}
    for better in ("higher", "lower"):
        assert run(["review", "--table", str(table), "--better", better, "--json"]) == 0
        cues = json.loads(capsys.readouterr().out)["cues"]
        found[better] = {line["cue"]: line["effect"] for line in cues}
    for cue, effect in found["higher"].items():
        assert found["lower"][cue] == pytest.approx(-effect, abs=1e-5)


def test_a_target_is_read(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A table can be ranked by how near values come to a target."""
    assert run(["review", "--table", str(table), "--better", "target:0", "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["better"] == "target"


@pytest.mark.parametrize("columns", ["80", "200"])
def test_plain_words_fit_the_terminal(
    table: Path,
    columns: str,
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """No line of the ranking is wider than the terminal; data go to stdout only."""
    monkeypatch.setenv("COLUMNS", columns)
    assert run(["review", "--table", str(table), "--better", "higher"]) == 0
    said = capsys.readouterr()
    assert said.err == ""
    assert said.out.startswith("What shifted: ")
    assert [line for line in said.out.splitlines() if len(line) > int(columns)] == []


def test_refused_rows_are_told_by_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A faulty row is named in the document and in words; the call succeeds."""
    path = tmp_path / "uses.csv"
    path.write_text("cue,learner,before,after\nx,a,1,2\nx,a,fast,2\n,a,1,1\n", encoding="utf-8")
    assert run(["review", "--table", str(path), "--better", "higher", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    (row,) = document["refused_rows"]
    assert row["row"] == 3
    assert any("3" in str(line) and "fast" in str(line) for line in document["refused"])
    assert run(["review", "--table", str(path), "--better", "higher"]) == 0
    assert "row 3: before is 'fast'" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("content", "options", "code", "words"),
    [
        (None, ["--better", "higher"], 3, "There is no file"),
        ("folder", ["--better", "higher"], 3, "is a folder"),
        (b"\x00\xff\xfe\x01\x02", ["--better", "higher"], 3, "cannot be read"),
        (b"", ["--better", "higher"], 3, "cannot be read"),
        (b"cue,learner\nx,a\n", ["--better", "higher"], 3, "no column before, after"),
        (b"cue,learner,before,after\nx,a,q,1\n", ["--better", "higher"], 3, "no usable row"),
        (b"cue,learner,before,after\nx,a,1,2\n", [], 2, "--better"),
        (b"cue,learner,before,after\nx,a,1,2\n", ["--better", "up"], 2, "higher, lower"),
        (b"cue,learner,before,after\nx,a,1,2\n", ["--better", "target:nan"], 2, "target"),
        (b"cue,learner,before,after\nx,a,1,2\n", ["--better", "target:0", "--transform", "log"], 2,
         "A target of 0 has no logarithm"),
        (b"cue,learner,before,after\nx,a,1,2\n", ["--better", "higher", "--worthwhile", "0"], 2,
         "worthwhile"),
        (b"cue,learner,before,after\nx,a,1,2\n", ["--better", "higher", "--allowance", "-1"], 2,
         "allowance"),
        (b"cue,learner,before,after,metric\nx,a,1,2,sparc\nx,a,1,3,pace\n",
         ["--better", "higher"], 5, "pace, sparc"),
        (b"cue,learner,before,after,contrast\nx,a,1,2,during\nx,a,1,3,retention\n",
         ["--better", "higher"], 5, "during, retention"),
        (b"cue,learner,before,after,task\nx,a,1,2,reaching\nx,a,1,3,gait\n",
         ["--better", "higher"], 5, "gait, reaching"),
    ],
)  # fmt: skip
def test_what_cannot_be_answered_is_one_line_with_its_code(
    tmp_path: Path,
    content: bytes | str | None,
    options: list[str],
    code: int,
    words: str,
    capsys: pytest.CaptureFixture[str],
) -> None:
    """The exit code says whose move it is; one line on stderr says what to do; stdout is empty."""
    path = tmp_path / "uses.csv"
    if content == "folder":
        path.mkdir()
    elif isinstance(content, bytes):
        path.write_bytes(content)
    assert run(["review", "--table", str(path), *options]) == code
    said = capsys.readouterr()
    assert said.out == ""
    assert len(said.err.splitlines()) == 1
    assert words in said.err


def test_a_broken_parquet_file_is_one_line(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A file that only has the name of Parquet is an input error."""
    path = tmp_path / "uses.parquet"
    path.write_bytes(b"not parquet at all")
    assert run(["review", "--table", str(path), "--better", "higher"]) == 3
    said = capsys.readouterr()
    assert (said.out, len(said.err.splitlines())) == ("", 1)


def test_nothing_to_review_is_wrong_usage(capsys: pytest.CaptureFixture[str]) -> None:
    """Neither a metric nor a table: the two ways are named."""
    assert run(["review"]) == 2
    assert "--metric ID, or --table FILE" in capsys.readouterr().err
