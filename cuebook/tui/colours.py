"""Two themes from one blue and orange pair; signs and words stand beside every colour."""

from __future__ import annotations

from textual.theme import Theme

DARK = Theme(
    name="cuebook-dark",
    primary="#6fa8dc",
    secondary="#6fa8dc",
    accent="#e69138",
    warning="#e69138",
    error="#e69138",
    success="#6fa8dc",
    background="#101418",
    surface="#181e24",
    panel="#22303c",
    foreground="#e8e8e8",
    dark=True,
)
LIGHT = Theme(
    name="cuebook-light",
    primary="#0b5394",
    secondary="#0b5394",
    accent="#a35200",
    warning="#a35200",
    error="#a35200",
    success="#0b5394",
    background="#fbfbf8",
    surface="#f2f2ee",
    panel="#dfe6ec",
    foreground="#1a1a1a",
    dark=False,
)
