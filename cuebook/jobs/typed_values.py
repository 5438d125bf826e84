"""Numbers as a user types them."""

from __future__ import annotations

import math

from cuebook.errors import UsageError


def parse_values(texts: tuple[str, ...], option: str) -> dict[str, tuple[float, ...]]:
    """Read ``METRIC=NUMBER[,NUMBER…]`` texts into numbers per metric, in the order typed.

    Raises
    ------
    UsageError : no ``=``, no number, or something that is not a finite number.
    """
    values: dict[str, tuple[float, ...]] = {}
    for text in texts:
        metric, separator, numbers = text.partition("=")
        if not separator or not metric.strip():
            raise UsageError(
                f"{option} reads '{text}'.", f"Write METRIC=NUMBER, such as {option} sparc=-1.6."
            )
        typed = tuple(_parse_number(number, text, option) for number in numbers.split(","))
        values[metric.strip()] = values.get(metric.strip(), ()) + typed
    return values


def _parse_number(number: str, text: str, option: str) -> float:
    try:
        value = float(number)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise UsageError(
            f"{option} {text}: '{number.strip()}' is not a number.",
            "Separate several numbers by commas and write a decimal point, such as 1.6,1.7.",
        )
    return value
