"""The public balance set of Santos & Duarte (2016), PeerJ 4:e2648, CC BY 4.0."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from cuebook.cli.main import run
from cuebook.recordings.reading import read_recording

pytestmark = pytest.mark.recordings
TRIALS = (1, 4, 7, 10, 37, 40, 43, 46)
SETTINGS = ("lowpass_hz=none", "discard_s=0", "duration=samples", "ellipse=f")


@pytest.mark.parametrize("trial", TRIALS)
def test_sway_equals_the_published_values(
    recordings_folder: Path, capsys: pytest.CaptureFixture[str], trial: int
) -> None:
    """Mean velocity (x10, mm/s) and ellipse area (x100, mm2) within 1e-9 relative."""
    folder = recordings_folder / "human-balance-bds"
    with (folder / "expected_first200.csv").open(encoding="utf-8") as file:
        published = {row["Trial"]: row for row in csv.DictReader(file)}
    name = f"BDS{trial:05d}"
    arguments = ["measure", str(folder / f"{name}.txt"), "--task", "standing_balance", "--json"]
    for setting in SETTINGS:
        arguments += ["--set", setting]
    assert run(arguments) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["format"] == "cuebook.measure/1"
    values = {one["metric"]: one["value"] for one in document["measurements"]}
    expected = published[name]
    assert values["sway_velocity_mm_s"] == pytest.approx(10 * float(expected["COPvelo"]), rel=1e-9)
    assert values["sway_area_mm2"] == pytest.approx(100 * float(expected["COParea"]), rel=1e-9)


@pytest.mark.parametrize("trial", TRIALS[:2])
def test_the_centre_of_pressure_follows_from_the_forces(
    recordings_folder: Path, trial: int
) -> None:
    """The set's own definition: COPx = -100 My / Fz (cm), to the printed digits."""
    recording = read_recording(recordings_folder / "human-balance-bds" / f"BDS{trial:05d}.txt")
    signals = {signal.name: signal.values for signal in recording.signals}
    from_force = -signals["My[Nm]"] / signals["Fz[N]"]
    assert np.max(np.abs(100 * (from_force - signals["COPx[cm]"]))) < 1e-5
