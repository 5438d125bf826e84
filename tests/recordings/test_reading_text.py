from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import CuebookError, InputError, NeedsAnswerError, UsageError
from cuebook.recordings.channels import describe_column
from cuebook.recordings.reading import read_content, read_recording
from cuebook.recordings.recording import ReadingOptions

ROWS = 40


def make_text(
    delimiter: str = ",",
    decimal: str = ".",
    *,
    newline: str = "\n",
    header: str = "time_s,hand_x_m,hand_y_m",
    preamble: str = "",
    tail: str = "",
    bom: bool = False,
) -> bytes:
    """Return a recording of 40 samples at 100 Hz as the bytes of a text file."""
    lines = [header.replace(",", delimiter)]
    for at in range(ROWS):
        cells = (f"{at / 100:.2f}", f"{at * 0.013:.6f}", f"{0.5 - at * 0.007:.6f}")
        lines.append(delimiter.join(cell.replace(".", decimal) for cell in cells) + tail)
    text = preamble + newline.join(lines) + newline
    return (b"\xef\xbb\xbf" if bom else b"") + text.encode("utf-8")


@given(
    st.sampled_from([(",", "."), (";", "."), (";", ","), ("\t", "."), ("\t", ","), (" ", ".")]),
    st.sampled_from(["\n", "\r\n"]),
    st.booleans(),
    st.sampled_from(["", "# a remark\n", "// a remark\n\n", "Export of a device\nsecond line\n"]),
)
def test_every_dialect_gives_the_same_numbers(
    marks: tuple[str, str],
    newline: str,
    bom: bool,
    preamble: str,
) -> None:
    """Delimiter, decimal mark, line ends, byte order mark and remarks change nothing."""
    delimiter, decimal = marks
    content = make_text(delimiter, decimal, newline=newline, bom=bom, preamble=preamble)
    recording = read_content(content, "reach.csv")
    assert recording.rate_hz == pytest.approx(100.0)
    track = recording.get_track("position")
    assert track is not None
    assert track.is_unit_known
    assert np.allclose(track.values[:, 0], np.arange(ROWS) * 0.013, atol=1e-9)
    assert np.allclose(track.values[:, 1], 0.5 - np.arange(ROWS) * 0.007, atol=1e-9)


def test_a_delimiter_at_the_end_of_each_line_is_no_column() -> None:
    """Trailing commas are ignored."""
    recording = read_content(make_text(tail=","), "reach.csv")
    assert len(recording.signals) == 2


@pytest.mark.parametrize(
    ("name", "unit", "factor"),
    [
        ("x[cm]", "cm", 0.01),
        ("hand_x_mm", "mm", 0.001),
        ("Hand X (m)", "m", 1.0),
        ("COPx[cm]", "cm", 0.01),
    ],
)
def test_a_unit_in_a_name_is_used_and_said(name: str, unit: str, factor: float) -> None:
    """A unit in the header is evidence enough to convert; the notes say so."""
    recording = read_content(make_text(header=f"Time[s],{name},other_y_m"), "reach.csv")
    signal = recording.signals[0]
    assert signal.unit == unit
    assert signal.values[1] == pytest.approx(0.013 * factor)
    assert (factor == 1.0) or any(unit in note for note in recording.notes)


def test_a_unit_that_is_nowhere_stays_unknown() -> None:
    """Without a unit the values stay as they are, and that is said."""
    recording = read_content(make_text(header="time_s,hand_x,hand_y"), "reach.csv")
    assert recording.signals[0].unit is None
    assert any("unknown" in note for note in recording.notes)


def test_a_given_unit_wins_over_the_header() -> None:
    """What the user says is read, and noted as theirs."""
    options = ReadingOptions(units={"*": "cm"})
    recording = read_content(make_text(), "reach.csv", options)
    assert recording.signals[0].values[1] == pytest.approx(0.00013)


@pytest.mark.parametrize(
    ("content", "error", "words"),
    [
        (b"", InputError, "empty"),
        (b"  \n \n", InputError, "empty"),
        (b"\x89PNG\x00\x01\x02" * 20, InputError, "not a text file"),
        (b"\x1f\x8bdamaged", InputError, "damaged gzip"),
        (b"hello there\nthis is prose\n", InputError, "No table of numbers"),
        (b"x_m,y_m\n1,2\n2,3\n3,4\n", NeedsAnswerError, "no column of time"),
        (b"1,2,3\n2,3,4\n3,4,5\n", NeedsAnswerError, "without names"),
        (b"time,x_m\n1,0.1\n2,0.2\n3,0.3\n", NeedsAnswerError, "counts samples"),
        (b"time_s,x_m\n0.0,1\n0.1,2\n0.05,3\n0.2,4\n", InputError, "line 4"),
        (b"time_s,x_m\n0.0,1\n0.1,two\n0.2,3\n0.3,4\n", InputError, "Line 3"),
        (b"time_s,x_m\n0.0,0\n0.1,0\n0.2,0\n0.3,0\n", InputError, "0 or missing"),
        (b"time_s,x_m\n0.0,1\n,2\n0.2,3\n0.3,4\n", InputError, "no time"),
    ],
)
def test_bad_content_is_named_with_its_place(
    content: bytes, error: type[CuebookError], words: str
) -> None:
    """What is wrong, and where, stands in the message."""
    with pytest.raises(error, match=words):
        read_content(content, "bad.csv")


def test_a_missing_file_and_a_folder_are_refused(tmp_path: Path) -> None:
    """A name that leads to no file is said plainly."""
    with pytest.raises(InputError, match="no file"):
        read_recording(tmp_path / "nothing.csv")
    with pytest.raises(InputError, match="is a folder"):
        read_recording(tmp_path)


def test_an_unknown_column_names_the_nearest() -> None:
    """A column that is not there leads to one that is."""
    options = ReadingOptions(columns={"time": "time_s", "x": "hand_xm"})
    with pytest.raises(UsageError) as caught:
        read_content(make_text(), "reach.csv", options)
    assert "hand_x_m" in caught.value.hint


@pytest.mark.parametrize(
    ("options", "words", "nearest"),
    [
        (ReadingOptions(columns={"tiem": "time_s", "x": "hand_x_m"}), "'tiem'", "time"),
        (ReadingOptions(columns={"tap": "1", "baet": "2"}), "'baet'", "beat"),
        (ReadingOptions(units={"hand_xx": "cm"}), "'hand_xx'", "hand_x"),
        (ReadingOptions(units={"*": "N"}), "fits no channel", "--units"),
    ],
)
def test_a_word_that_no_option_knows_is_never_passed_over(
    options: ReadingOptions, words: str, nearest: str
) -> None:
    """A slip in a channel's name is answered with the nearest, not ignored."""
    with pytest.raises(UsageError, match=words) as caught:
        read_content(make_text(), "reach.csv", options)
    assert nearest in caught.value.hint


@pytest.mark.parametrize("key", ["x", "hand", "hand_x", "hand_x_m", "position"])
def test_a_channel_is_meant_by_any_of_its_names(key: str) -> None:
    """A unit may be given by axis, point, both, column or quantity."""
    recording = read_content(make_text(), "reach.csv", ReadingOptions(units={key: "cm"}))
    assert recording.signals[0].unit == "cm"


def test_one_unit_for_all_holds_for_all_it_fits() -> None:
    """Centimetres are of no concern to a force."""
    rows = "\n".join(f"{at / 100},700,{at * 0.01},{at * 0.02}" for at in range(20))
    content = f"time_s,Fz[N],CoPx,CoPy\n{rows}\n".encode()
    recording = read_content(content, "plate.csv", ReadingOptions(units={"*": "cm"}))
    assert [signal.unit for signal in recording.signals] == ["N", "cm", "cm"]


@pytest.mark.parametrize("unit", ["*", "time", "onset"])
def test_a_unit_given_for_events_is_the_unit_of_time(unit: str) -> None:
    """Events in milliseconds are read in milliseconds, however that is said."""
    options = ReadingOptions(units={unit: "ms"})
    recording = read_content(b"onset\n500\n1000\n1600\n", "taps.csv", options)
    assert recording.events["onset"].tolist() == [0.5, 1.0, 1.6]


@pytest.mark.parametrize(
    ("name", "quantity", "axis"),
    [
        ("CoPx", "centre_of_pressure", "x"),
        ("COPy[cm]", "centre_of_pressure", "y"),
        ("cop_ap", "centre_of_pressure", "y"),
        ("Center of Pressure X (mm)", "centre_of_pressure", "x"),
        ("handX", "position", "x"),
        ("left_hand_y_mm", "position", "y"),
        ("Gyroscope X (deg/s)", "angular_speed", "x"),
        ("accY", "acceleration", "y"),
        ("Fz", "force", "z"),
        ("Time[s]", "time", None),
        ("pen_pressure", "unknown", None),
    ],
)
def test_a_column_is_known_by_how_devices_name_it(
    name: str, quantity: str, axis: str | None
) -> None:
    """Names with and without units, capitals and underscores say what they are."""
    channel = describe_column(name, 0)
    assert (channel.quantity, channel.axis) == (quantity, axis)


def test_bare_axes_are_taken_for_a_position_and_that_is_said() -> None:
    """Columns x and y may be anything; what they were taken for stands in the notes."""
    recording = read_content(make_text(header="t,x,y"), "reach.csv")
    assert any(note.startswith("assumed: 'x', 'y'") for note in recording.notes)


def test_a_recording_cannot_be_changed() -> None:
    """Neither the recording nor the numbers in it can be written to."""
    recording = read_content(make_text(), "reach.csv")
    with pytest.raises(ValueError, match="read-only"):
        recording.signals[0].values[0] = 1.0
    with pytest.raises(AttributeError):
        recording.rate_hz = 1.0  # type: ignore[misc]


def test_infinite_samples_are_missing() -> None:
    """A sensor's inf is no number."""
    rows = "\n".join(f"{at / 100},{'inf' if at == 5 else at}" for at in range(20))
    recording = read_content(f"time_s,x_m\n{rows}\n".encode(), "r.csv")
    assert np.isnan(recording.signals[0].values[5])


@given(st.lists(st.floats(-1e6, 1e6), min_size=5, max_size=40).filter(any))
def test_numbers_come_back_to_the_last_bit(values: list[float]) -> None:
    """What was printed in full is read in full."""
    rows = "\n".join(f"{at / 100!r},{value!r}" for at, value in enumerate(values))
    recording = read_content(f"time_s,x_m\n{rows}\n".encode(), "r.csv")
    assert recording.signals[0].values.tolist() == values


def test_columns_can_be_given_by_number_for_a_file_without_names() -> None:
    """Numbers count from 1."""
    content = make_text().split(b"\n", 1)[1]
    options = ReadingOptions(columns={"time": "1", "x": "2"}, units={"x": "m", "time": "s"})
    recording = read_content(content, "reach.csv", options)
    assert recording.signals[0].values[2] == pytest.approx(0.026)


def test_a_rate_the_user_gives_stands_in_for_time() -> None:
    """Without stamps the rate counts the time, and is named as the user's."""
    recording = read_content(
        b"x_m,y_m\n0.1,0.2\n0.2,0.3\n0.3,0.4\n", "r.csv", ReadingOptions(rate_hz=50.0)
    )
    assert (recording.rate_hz, recording.rate_source) == (50.0, "user")


@pytest.mark.parametrize(("step", "unit", "rate"), [(10, "ms", 100), (5000, "us", 200)])
def test_the_unit_of_time_follows_from_the_only_possible_rate(
    step: int, unit: str, rate: float
) -> None:
    """A step that fits one usual rate names its unit; the note shows the evidence."""
    rows = "\n".join(f"{at * step},{at * 0.01}" for at in range(20))
    recording = read_content(f"time,x_m\n{rows}\n".encode(), "r.csv")
    assert recording.rate_hz == pytest.approx(rate)
    assert any(f"in {unit}" in note for note in recording.notes)


def test_repeated_stamps_are_dropped_and_counted() -> None:
    """A stamp that repeats is one sample."""
    rows = [f"{at / 100:.2f},{at}" for at in range(20)]
    rows.insert(5, rows[5])
    recording = read_content(("time_s,x_m\n" + "\n".join(rows) + "\n").encode(), "r.csv")
    assert recording.n_samples == 20
    assert any("1 repeated" in note for note in recording.notes)


def test_rounded_stamps_are_kept_and_jitter_is_resampled() -> None:
    """150 Hz stamped in milliseconds is even; stamps that wander are not."""
    even = "\n".join(f"{round(at / 150, 3)},{at}" for at in range(200))
    recording = read_content(f"time_s,x_m\n{even}\n".encode(), "r.csv")
    assert not recording.is_resampling_needed
    assert recording.rate_hz == pytest.approx(150.0, rel=1e-3)
    rng = np.random.default_rng(1)
    stamps = np.sort(np.arange(200) / 150 + rng.uniform(-0.002, 0.002, 200))
    jittered = "\n".join(f"{stamp:.6f},{at}" for at, stamp in enumerate(stamps))
    assert read_content(f"time_s,x_m\n{jittered}\n".encode(), "r.csv").is_resampling_needed


@pytest.mark.parametrize(
    ("start", "scale", "digits"),
    [(1568054294283405, 1e6, 0), (1568054294.283, 1.0, 3), (354642400.0, 1e3, 0)],
)
def test_even_stamps_of_a_late_clock_are_kept(start: float, scale: float, digits: int) -> None:
    """An epoch in seconds, microseconds or a tablet's milliseconds is no jitter by its size."""
    stamps = [start + round(at / 60 * scale, digits) for at in range(300)]
    rows = "\n".join(f"{stamp:.{digits}f},{at}" for at, stamp in enumerate(stamps))
    recording = read_content(f"timestamp,x_m\n{rows}\n".encode(), "r.csv")
    assert recording.rate_hz == pytest.approx(60.0, rel=2e-4)
    assert not recording.is_resampling_needed


def test_a_counter_with_a_rate_keeps_its_lost_samples() -> None:
    """Counts that are left out are gaps, not time that never was."""
    counts = [*range(1, 31), *range(36, 61)]
    rows = "\n".join(f"{count},{0.1 * count}" for count in counts)
    options = ReadingOptions(columns={"time": "frame", "x": "x_m"}, rate_hz=50.0)
    recording = read_content(f"frame,x_m\n{rows}\n".encode(), "r.csv", options)
    assert recording.duration_s == pytest.approx(59 / 50)
    assert [gap.duration_s for gap in recording.gaps] == [pytest.approx(6 / 50)]
    assert recording.rate_source == "user"


def test_a_rate_that_contradicts_the_stamps_is_said() -> None:
    """The rate a user gives is taken; what the column says stands beside it."""
    recording = read_content(make_text(), "r.csv", ReadingOptions(rate_hz=50.0))
    assert recording.rate_hz == 50.0
    assert any("says 100 Hz" in note for note in recording.notes)
    agreed = read_content(make_text(), "r.csv", ReadingOptions(rate_hz=100.5))
    assert not any("says" in note for note in agreed.notes)


def test_holes_in_time_are_gaps_and_do_not_slow_the_rate() -> None:
    """The rate is that of the samples that are there."""
    times = [at / 100 for at in range(50)] + [1.0 + at / 100 for at in range(50)]
    rows = "\n".join(f"{time:.2f},{at}" for at, time in enumerate(times))
    recording = read_content(f"time_s,x_m\n{rows}\n".encode(), "r.csv")
    assert recording.rate_hz == pytest.approx(100.0)
    assert len(recording.gaps) == 1


@pytest.mark.parametrize(
    ("content", "expects", "kinds"),
    [
        (b"onset\n0.5\n1.0\n1.6\n", False, {"onset": 3}),
        (b"onset\ttrial_type\n0.5\ttap\n0.6\tbeat\n1.1\ttap\n", False, {"tap": 2, "beat": 1}),
        (b"tap,beat\n0.5,0.6\n1.1,1.2\n1.7,\n", False, {"tap": 3, "beat": 2}),
        (b"0.5\n1.0\n1.6\n2.0\n", True, {"onset": 4}),
    ],
)
def test_event_lists_in_every_form(
    content: bytes,
    expects: bool,
    kinds: dict[str, int],
) -> None:
    """Onsets with or without a kind, two columns, or one bare column."""
    recording = read_content(content, "taps.tsv", expects_events=expects)
    assert {kind: times.size for kind, times in recording.events.items()} == kinds


def test_events_that_go_back_in_time_are_refused() -> None:
    """A list that is not in order names the line."""
    with pytest.raises(InputError, match="line 4"):
        read_content(b"onset\n0.5\n1.0\n0.9\n", "taps.csv")


@given(st.binary(max_size=300))
def test_any_bytes_are_read_or_answered(content: bytes) -> None:
    """Whatever lies in a file, the user gets a recording or a clear answer."""
    try:
        read_content(content, "any.csv")
    except CuebookError as error:
        said = error.message
        assert said
