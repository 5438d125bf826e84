"""Every file of the recordings folder is read, or answered with a clear question."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from cuebook.errors import CuebookError
from cuebook.metrics.engine import measure_recording
from cuebook.recordings.reading import read_recording
from cuebook.recordings.recording import ReadingOptions

pytestmark = pytest.mark.recordings


def list_data_files() -> list[str]:
    """Return the files of the folder, but for the notes that go with them."""
    folder = Path(os.environ.get("CUEBOOK_RECORDINGS", "."))
    return sorted(
        str(path.relative_to(folder))
        for path in folder.rglob("*")
        if path.is_file() and path.suffix != ".md"
    )


@pytest.mark.parametrize("name", list_data_files())
def test_a_file_is_read_or_answered(recordings_folder: Path, name: str) -> None:
    """A recording or an error for the user; never anything else."""
    said = ""
    try:
        recording = read_recording(recordings_folder / name)
        measured = measure_recording(recording)
    except CuebookError as error:
        said = error.message
    if said:
        assert "\n" not in said
        return
    assert recording.n_samples > 0
    assert all((one.value is None) == (one.reason is not None) for one in measured)


def test_real_drum_taps_give_the_tempo_of_their_blocks(recordings_folder: Path) -> None:
    """Taps of one person (ds004152, CC0) through the event path: a plausible steady interval."""
    path = recordings_folder / "drum-tapping" / "sub-02_task-drumtrainer_events.tsv"
    recording = read_recording(path)
    assert sum(times.size for times in recording.events.values()) > 2000
    assert recording.duration_s > 1000


def test_phone_walk_rate_is_read_from_its_epoch_stamps(recordings_folder: Path) -> None:
    """Milliseconds since an epoch, about 10 Hz; the step names the unit."""
    recording = read_recording(recordings_folder / "phone-walk-10hz" / "test_data_bout.csv")
    assert recording.rate_hz == pytest.approx(10.0, rel=0.02)


def test_rounded_stamps_are_not_taken_for_jitter(recordings_folder: Path) -> None:
    """120 Hz stamped in milliseconds: the mean of the steps, not the median, gives the rate."""
    recording = read_recording(recordings_folder / "bmc-videotrack" / "dados.txt")
    assert recording.rate_hz == pytest.approx(120.0, rel=0.002)
    assert not recording.is_resampling_needed


def test_a_force_without_a_rate_is_asked_about(recordings_folder: Path) -> None:
    """A single column of force says neither what it is nor how fast it came."""
    path = recordings_folder / "bmc-jump" / "GRFZjump.txt"
    with pytest.raises(CuebookError, match="columns without names"):
        read_recording(path)
    recording = read_recording(path, ReadingOptions(columns={"fz": "1"}, rate_hz=600.0))
    assert recording.rate_hz == 600.0
