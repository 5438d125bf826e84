"""The scale on which attempts are compared: transformed, then oriented so that plus is better."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from cuebook.errors import InputError, NeedsAnswerError

TRANSFORMS = ("none", "log", "logit", "sqrt")


@dataclass(frozen=True, slots=True)
class ScaledValues:
    """Attempt values on the common scale."""

    values: tuple[float, ...]
    flags: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class AttemptScale:
    """How one metric's attempts are transformed and oriented; fixed by its registry entry."""

    metric: str
    transform: str = "none"
    better: str = "higher"
    """higher, lower or target."""
    target: float | None = None
    """Best value of a target metric, in its own unit; None for the others."""
    resolution: float | None = None
    """Smallest difference the measure can show, in its unit; None if unknown."""
    unit: str = ""

    def __post_init__(self) -> None:
        if self.better not in {"higher", "lower", "target"}:
            raise NeedsAnswerError(
                f"{self.metric} has no direction of its own.",
                "Say what is better: --better higher, lower or target:VALUE.",
            )
        if self.transform not in TRANSFORMS:
            raise NeedsAnswerError(
                f"{self.metric}: no transform is called {self.transform}.",
                f"Known are {', '.join(TRANSFORMS)}.",
            )
        if self.better == "target" and self.target is None:
            raise NeedsAnswerError(
                f"{self.metric} is best at a target.", "Name it: --better target:VALUE."
            )

    @property
    def sign(self) -> int:
        """Return +1 where more is better, else -1."""
        return 1 if self.better == "higher" else -1

    @property
    def transformed_resolution(self) -> float | None:
        """Return the resolution on the transformed scale where that is a constant."""
        return self.resolution if self.transform == "none" else None

    def transform_value(self, value: float) -> tuple[float, str | None]:
        """Return one value on the transformed scale, and a flag if it had to be helped.

        Raises
        ------
        InputError : a value where the scale has none: negative, or a share (logit) that is not
            between 0 and 1. Hits out of tries go through ``transform_hits``.
        """
        if self.transform == "none":
            return value, None
        if value < 0:
            raise InputError(
                f"{self.metric}: {value:g} is negative, which this measure cannot be.",
                "Correct or remove the value.",
            )
        if self.transform == "logit":
            if not 0 < value < 1:
                raise InputError(
                    f"{self.metric}: {value:g} is not a share between 0 and 1.",
                    "Give hits and tries, or use --transform none.",
                )
            return math.log(value / (1.0 - value)), None
        if self.transform == "sqrt":
            return math.sqrt(value + 3.0 / 8.0), None
        if value == 0:
            # Half the smallest difference the measure can show stands for "less than we see".
            if not self.resolution:
                raise InputError(
                    f"{self.metric}: 0 has no logarithm and the resolution is not known.",
                    "Leave the value out, or use --transform none.",
                )
            return math.log(self.resolution / 2.0), "zero_as_half_resolution"
        return math.log(value), None

    def apply(self, values: Sequence[float]) -> ScaledValues:
        """Return attempts on the common scale: plus is better.

        A target metric is folded attempt by attempt: minus the distance to the target.
        """
        flags: list[str] = []
        goal = None if self.target is None else self.transform_value(self.target)[0]
        scaled = []
        for value in values:
            on_scale, flag = self.transform_value(value)
            if flag and flag not in flags:
                flags.append(flag)
            if self.better == "target" and goal is not None:
                scaled.append(-abs(on_scale - goal))
            else:
                scaled.append(self.sign * on_scale)
        return ScaledValues(tuple(scaled), tuple(flags))


def transform_hits(hits: float, tries: float) -> tuple[float, float]:
    """Return the empirical logit of hits out of tries, and its sampling variance."""
    misses = tries - hits
    return (
        math.log((hits + 0.5) / (misses + 0.5)),
        1.0 / (hits + 0.5) + 1.0 / (misses + 0.5),
    )
