"""Tables of uses: what is understood, what is refused and by which line."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

import pandas as pd
import pytest

from cuebook.errors import InputError, NeedsAnswerError, UsageError
from cuebook.evidence.use_table import UseTable, read_use_table
from cuebook.practice.scales import AttemptScale

HIGHER = AttemptScale("table", "none", "higher")
LOG_LOWER = AttemptScale("table", "log", "lower")
AT_ZERO = AttemptScale("table", "none", "target", 0.0)
MINIMAL = "cue,learner,before,after\nspoon,a,1,2\n,a,2,2.5\n"


def write(tmp_path: Path, text: str) -> Path:
    """Write a table and return its path."""
    path = tmp_path / "uses.csv"
    path.write_text(text, encoding="utf-8")
    return path


def read(tmp_path: Path, text: str, scale: AttemptScale = HIGHER) -> UseTable:
    """Write and read a table."""
    return read_use_table(write(tmp_path, text), scale)


def get_refused(table: UseTable) -> Mapping[int, str]:
    """Return why each line was refused."""
    return {one.row: one.reason for one in table.refused}


def test_four_columns_are_enough(tmp_path: Path) -> None:
    """A cue, a learner, before and after: an empty cue is practice alone."""
    table = read(tmp_path, MINIMAL)
    cued, alone = table.changes
    assert (cued.use.cue, cued.difference, cued.before.n) == ("spoon", 1.0, 1)
    assert (alone.use.cue, alone.difference, alone.cue_weights) == (None, 0.5, ())
    assert table.contrast == "immediate"
    assert table.refused == ()


def test_every_optional_column_arrives(tmp_path: Path) -> None:
    """Numbers of attempts, spread, session, order, kind, choice, event and days are kept."""
    table = read(
        tmp_path,
        "cue,learner,before,after,n_before,n_after,sd_before,sd_after,session,order,kind,chosen,"
        "assigned,event,task,tempo,age_band,background,metric,contrast,days,stopped,ignored\n"
        "spoon,a,1,2,3,2,.5,.1,7,4,analogy,random,bowl,club:1,reaching,slow,adult,cooking,sparc,"
        "retention,3,,x\n"
        "spoon,a,1,2,3,2,.5,.1,9,1,analogy,planned,,,reaching,slow,adult,cooking,sparc,"
        "retention,3,pain,x\n",
    )
    (change,) = table.changes
    assert (change.before.n, change.after.n) == (3, 2)
    assert change.before.sum_of_squares == pytest.approx(2 * 0.5**2)
    assert change.after.sum_of_squares == pytest.approx(0.1**2)
    use = change.use
    assert (use.k, use.kind, use.randomised, use.assigned) == (4, "analogy", True, "bowl")
    assert (use.event, use.task, change.days) == ("club:1", "reaching", 3.0)
    assert (table.metric, table.contrast, table.task) == ("sparc", "retention", "reaching")
    (stopped,) = table.without
    assert (stopped.reason, stopped.use.stop_reason) == ("stopped", "pain")
    assert not stopped.use.randomised


def test_parquet_says_the_same_as_text(tmp_path: Path) -> None:
    """A Parquet file with real numbers and missing cells reads as its CSV twin."""
    frame = pd.DataFrame(
        {
            "cue": ["spoon", None, "bowl"],
            "learner": ["a", "a", "b"],
            "before": [1.5, 2.0, 3.0],
            "after": [2.5, float("nan"), 3.5],
            "n_before": [3, 1, 2],
            "sd_before": [0.5, None, 0.25],
            "session": [10, 9, 1],
        }
    )
    frame.to_parquet(tmp_path / "uses.parquet")
    frame.to_csv(tmp_path / "uses.csv", index=False)
    one = read_use_table(tmp_path / "uses.parquet", HIGHER)
    other = read_use_table(tmp_path / "uses.csv", HIGHER)
    assert [change.difference for change in one.changes] == [1.0, 0.5]
    assert [(c.before, c.after, c.use.t, c.use.cue) for c in one.changes] == [
        (c.before, c.after, c.use.t, c.use.cue) for c in other.changes
    ]
    assert [gone.reason for gone in one.without] == ["no_after"]


@pytest.mark.parametrize(
    ("line", "reason"),
    [
        ("spoon,a,,,,", "neither before nor after"),
        (",,,,,", "empty"),
        ("spoon,,1,2,,", "no learner"),
        ("", "empty"),
        ("spoon,a,inf,2,,", "before is 'inf', not a finite number"),
        ("spoon,a,1,nan,,", "after is 'nan', not a finite number"),
        ("spoon,a,fast,2,,", "before is 'fast', not a finite number"),
        ("spoon,a,1,2,,", "the same as an earlier row"),
        ("spoon,a,1,5,1,.3", "sd_before needs at least two attempts and cannot be negative"),
        ("spoon,a,1,5,2,-1", "sd_before needs at least two attempts and cannot be negative"),
        ("spoon,a,1,5,1.5,", "n_before is 1.5, not a whole number of at least 1"),
        ("spoon,a,1,5,0,", "n_before is 0, not a whole number of at least 1"),
    ],
)
def test_unusable_rows_are_named_by_their_line(tmp_path: Path, line: str, reason: str) -> None:
    """The row is refused by its line in the file, and the rest is read."""
    head = "cue,learner,before,after,n_before,sd_before\nspoon,a,1,2,,\n"
    table = read(tmp_path, f"{head}{line}\nbowl,a,3,4,,\n")
    assert get_refused(table) == {3: reason}
    assert [change.use.cue for change in table.changes] == ["spoon", "bowl"]


def test_lines_are_counted_as_an_editor_counts_them(tmp_path: Path) -> None:
    """A blank line in the file does not shift the line that is named."""
    table = read(tmp_path, "cue,learner,before,after\nspoon,a,1,2\n\nspoon,a,fast,2\n")
    assert get_refused(table) == {3: "empty", 4: "before is 'fast', not a finite number"}


def test_what_has_no_logarithm_is_refused(tmp_path: Path) -> None:
    """A negative value, or a 0 of unknown resolution, is refused by line; nothing crashes."""
    table = read(
        tmp_path, "cue,learner,before,after\nspoon,a,-1,2\nspoon,a,0,2\nspoon,a,8,2\n", LOG_LOWER
    )
    refused = get_refused(table)
    assert "negative" in refused[2]
    assert "0 has no logarithm" in refused[3]
    assert table.changes[0].difference == pytest.approx(1.3862943611)  # ln(8/2)


@pytest.mark.parametrize(
    ("sessions", "visits", "said"),
    [
        (("10", "9", "100"), (1, 0, 2), "by number"),
        (("2026-03-10", "2026-03-09", "2026-11-01"), (1, 0, 2), "by date"),
        (("second", "first", "third"), (0, 1, 2), "in order of first appearance"),
        (("2026-03-10", "first", "2026-03-09"), (0, 1, 2), "in order of first appearance"),
    ],
)
def test_sessions_are_ordered_and_it_is_said_how(
    tmp_path: Path, sessions: Sequence[str], visits: Sequence[int], said: str
) -> None:
    """Numbers and dates sort by value, text by first appearance; the table's notes say which."""
    rows = "".join(f"spoon,a,1,{at},{name}\n" for at, name in enumerate(sessions))
    table = read(tmp_path, f"cue,learner,before,after,session\n{rows}")
    assert tuple(change.use.t for change in table.changes) == tuple(visits)
    assert any("session" in note and said in note for note in table.notes)


def test_the_same_session_word_of_two_learners_is_two_sessions(tmp_path: Path) -> None:
    """Sessions are each learner's own; places in a session follow the rows."""
    table = read(
        tmp_path,
        "cue,learner,before,after,session\nx,a,1,2,1\ny,a,1,3,1\nx,b,1,2,1\nx,a,1,4,2\n",
    )
    uses = [change.use for change in table.changes]
    assert [(use.t, use.k) for use in uses] == [(0, 1), (0, 2), (0, 1), (1, 1)]
    assert uses[0].session == uses[1].session
    assert len({use.session for use in uses}) == 3


def test_without_sessions_each_row_is_a_visit(tmp_path: Path) -> None:
    """Rows of a learner are visits in their order, and it is said."""
    table = read(tmp_path, "cue,learner,before,after\nx,a,1,2\nx,b,1,2\nx,a,1,3\n")
    assert [change.use.t for change in table.changes] == [0, 0, 1]
    assert any("row order" in note for note in table.notes)


def test_means_are_folded_at_the_target(tmp_path: Path) -> None:
    """At a target of 0, going from -4 to 1 is 3 nearer; that means were folded is said."""
    table = read(tmp_path, "cue,learner,before,after\nspoon,a,-4,1\n", AT_ZERO)
    assert table.changes[0].difference == pytest.approx(3.0)
    assert any("fold" in note for note in table.notes)


@pytest.mark.parametrize("spread", ["", ".2"])
def test_folding_unlike_numbers_of_attempts_is_refused(tmp_path: Path, spread: str) -> None:
    """More than twice as many attempts on one side would move the folded mean by itself."""
    head = "cue,learner,before,after,n_before,n_after,sd_before,sd_after\n"
    lines = f"x,a,-4,1,2,5,{spread},{spread}\nx,a,-4,2,2,4,{spread},{spread}\n"
    table = read(tmp_path, head + lines, AT_ZERO)
    assert get_refused(table) == {2: "folding means at a target needs like numbers of attempts"}
    assert len(table.changes) == 1


def test_parts_of_one_retention_change_are_joined(tmp_path: Path) -> None:
    """Rows with the same change share it by weight and count as one change."""
    table = read(
        tmp_path,
        "cue,learner,before,after,contrast,change,weight\n"
        "spoon,a,1,2,retention,c1,.5\nbowl,a,1,2,retention,c1,.5\n"
        "spoon,a,2,3,retention,c2,1\nspoon,b,1,2,retention,c1,1\n",
    )
    joined = {(c.use.learner, c.before.mean): c.cue_weights for c in table.changes}
    assert joined == {
        ("a", 1.0): (("spoon", 0.5), ("bowl", 0.5)),
        ("a", 2.0): (("spoon", 1.0),),
        ("b", 1.0): (("spoon", 1.0),),
    }


@pytest.mark.parametrize("weights", [("0.5", "0.2"), ("-1", "2"), ("0", "0.5")])
def test_weights_that_are_no_shares_are_refused(tmp_path: Path, weights: Sequence[str]) -> None:
    """Weights of one change are above 0 and sum to 1, else its rows are refused."""
    table = read(
        tmp_path,
        "cue,learner,before,after,contrast,change,weight\n"
        f"spoon,a,1,2,retention,c1,{weights[0]}\nbowl,a,1,2,retention,c1,{weights[1]}\n"
        "spoon,a,2,3,retention,c2,1\n",
    )
    assert set(get_refused(table)) == {2, 3}
    assert len(table.changes) == 1


@pytest.mark.parametrize("name", ["metric", "contrast", "task"])
def test_several_questions_in_one_table_need_an_answer(tmp_path: Path, name: str) -> None:
    """Which are there is listed; picking one leaves the others out."""
    path = write(tmp_path, f"cue,learner,before,after,{name}\nx,a,1,2,retention\nx,a,1,3,during\n")
    with pytest.raises(NeedsAnswerError, match="during, retention"):
        read_use_table(path, HIGHER)
    table = read_use_table(path, HIGHER, **{name: "during"})
    assert [change.difference for change in table.changes] == [2.0]
    with pytest.raises(UsageError, match="nowhere"):
        read_use_table(path, HIGHER, **{name: "nowhere"})


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "cannot be read"),
        ("a,b\n1,2\n", "no column cue, learner, before, after"),
        ("cue,cue,learner,before,after\n", "names a column twice"),
        ("cue,learner,before,after\n", "no usable row"),
        ("cue,learner,before,after\nx,a,1,2\nx,a,1,2,3\n", "line 3 has more cells"),
        ("cue,learner,before,after\nx,a,fast,1\n", "Row 2: before is 'fast'"),
    ],
)
def test_a_file_without_a_usable_row_is_an_input_error(
    tmp_path: Path, text: str, message: str
) -> None:
    """What is wrong is said, with the first line where it went wrong."""
    with pytest.raises(InputError, match=message):
        read(tmp_path, text)
