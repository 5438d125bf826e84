from __future__ import annotations

import pytest

from cuebook.errors import CuebookError
from cuebook.tui.numbers import read_numbers


def test_numbers_of_the_known_measure_keep_their_order() -> None:
    """Spaces part the numbers; a comma with a space does, too."""
    assert read_numbers("41 43, 42", "step_length_cm") == {"step_length_cm": (41, 43, 42)}


def test_several_measures_stand_behind_their_names() -> None:
    """A name begins another measure; what stood before keeps its own."""
    typed = "step_length_cm 41 43; gait_speed_m_s 0.8 0.9"
    assert read_numbers(typed, None) == {
        "step_length_cm": (41, 43),
        "gait_speed_m_s": (0.8, 0.9),
    }


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ("41 x 42", "'x' is not a number"),
        ("1,6 1,7", "is the comma a decimal point?"),
        ("step_lenght_cm 41", "step_length_cm"),
        ("step_length_cm", "has no numbers"),
        ("nan", "Unknown metric"),
        ("-3", "cannot be negative"),
        ("1e999", "is not a number"),
    ],
)
def test_a_slip_is_named_and_nothing_guessed(typed: str, said: str) -> None:
    """Whatever cannot be a number of this measure is refused with what to write instead."""
    with pytest.raises(CuebookError) as refused:
        read_numbers(typed, "step_length_cm")
    assert said in str(refused.value)


def test_without_a_measure_it_is_asked_which() -> None:
    """Plain numbers need a measure that has been picked."""
    with pytest.raises(CuebookError, match="Which measure"):
        read_numbers("41 43", None)
