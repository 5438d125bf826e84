"""Reads a set of cues from its TOML file: all of it, or an error that names line and field."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Sequence
from pathlib import Path

from cuebook.errors import InputError, Place
from cuebook.library.cues import (
    IMPROVES,
    MAY_WORSEN,
    READY,
    SIDE_PLACE,
    SILENT,
    Claim,
    Cue,
    CueSet,
    Wording,
)
from cuebook.library.toml_fields import Table
from cuebook.library.toml_lines import find_decode_line, map_lines

FORMAT = "cuebook.cues/1"
_CUE_KEYS = (
    "code", "kind", "focus", "pair", "sister_of", "status", "problem", "phrases", "tasks",
    "regions", "cycle", "rate", "captures", "leaves_out", "caution", "target_metric",
    "watch_metric", "fit", "claims", "wording",
)  # fmt: skip
_FIT_KEYS = (
    "age_low", "age_high", "experience", "background_good", "background_avoid", "access_avoid",
    "note_avoid",
)  # fmt: skip
_CODE = re.compile(r"[a-z0-9]+(-[a-z0-9]+)*")
_METRIC = re.compile(r"[a-z0-9]+(_[a-z0-9]+)*")
_LANGUAGE = re.compile(r"[A-Za-z]{2,8}(-[A-Za-z0-9]{1,8})*")
_BRACES = re.compile(r"[{}]")


def read_cue_set(path: Path) -> CueSet:
    """Read one set of cues.

    Raises
    ------
    InputError : the file cannot be read, is not UTF-8 TOML of this format, or a field is wrong;
        names file, line and field. Nothing is returned of a damaged set.
    """
    try:
        text = path.read_bytes().decode("utf-8")
    except OSError as error:
        raise InputError(
            f"{path} cannot be read: {error.strerror}.", "Check the path.", Place(file=str(path))
        ) from error
    except UnicodeDecodeError as error:
        raise InputError(
            f"{path} is not UTF-8 text.", "Save it as UTF-8.", Place(file=str(path))
        ) from error
    return parse_cue_set(text, str(path))


def parse_cue_set(text: str, name: str) -> CueSet:
    """Read a set of cues from TOML text; `name` is what errors call the file."""
    # TOML lets lines end in CR LF; a lone CR is left for tomllib to refuse.
    text = text.replace("\r\n", "\n")
    try:
        document = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        line = find_decode_line(str(error), text)
        raise InputError(
            f"Line {line} of {name} is not TOML: {error}.",
            "Check quotes, brackets and commas near there.",
            Place(file=name, row=line),
        ) from error
    root = Table(document, (), map_lines(text), name)
    if document.get("format") != FORMAT:
        raise root.complain("format", f"must be '{FORMAT}'", "This is not a set of cues.")
    root.check_keys(("format", "set", "cue"))
    head = root.table("set")
    head.check_keys(("code", "title", "about", "language"))
    cue_set = CueSet(
        code=head.pattern("code", _CODE, "small letters, digits and hyphens"),
        title=head.text("title", required=True),
        about=head.text("about"),
        language=head.pattern("language", _LANGUAGE, "a BCP 47 tag such as en", default="en"),
        cues=tuple(_read_cue(table) for table in root.tables("cue")),
    )
    _check_codes(cue_set.cues, root)
    return cue_set


def _read_cue(table: Table) -> Cue:
    table.check_keys(_CUE_KEYS)
    rate_low, rate_high = _read_rate(table)
    fit = table.table("fit", required=False)
    fit.check_keys(_FIT_KEYS)
    cue = Cue(
        code=table.pattern("code", _CODE, "small letters, digits and hyphens"),
        kind=table.slug("kind", "cue_kind", required=True),
        focus=table.slug("focus", "focus", required=True),
        pair=table.text("pair"),
        sister_of=table.text("sister_of") or None,
        status=table.slug("status", "cue_status") or READY,
        problem=table.text("problem"),
        phrases=table.texts("phrases"),
        tasks=table.slugs("tasks", "task"),
        regions=table.slugs("regions", "region"),
        cycle=table.slug("cycle", "tempo_cycle") or None,
        rate_low=rate_low,
        rate_high=rate_high,
        age_low=fit.whole("age_low", least=0),
        age_high=fit.whole("age_high", least=0),
        experience=fit.slugs("experience", "experience"),
        background_good=fit.slugs("background_good", "background"),
        background_avoid=fit.slugs("background_avoid", "background"),
        access_avoid=fit.slugs("access_avoid", "access_need"),
        note_avoid=fit.slugs("note_avoid", "safety_note"),
        captures=table.text("captures"),
        leaves_out=table.text("leaves_out"),
        caution=table.text("caution"),
        target_metric=_read_metric(table, "target_metric"),
        watch_metric=_read_metric(table, "watch_metric"),
        claims=_read_claims(table),
        wordings=_read_wordings(table),
    )
    if cue.age_low is not None and cue.age_high is not None and cue.age_low > cue.age_high:
        raise fit.complain("age_high", "is below age_low", "Give the lower age first.")
    return cue


def _read_metric(table: Table, key: str) -> str | None:
    if key not in table.values:
        return None
    return table.pattern(key, _METRIC, "a metric id such as sparc")


def _read_rate(table: Table) -> tuple[float | None, float | None]:
    """Return the lowest and highest rate of a cue, in cycles a minute."""
    if "rate" not in table.values:
        return None, None
    rates = table.numbers("rate")
    if len(rates) != 2 or not 0 < rates[0] <= rates[1]:
        raise table.complain(
            "rate", "must be two numbers above 0, the lower first", "Write rate = [80, 100]."
        )
    if "cycle" not in table.values:
        raise table.complain("rate", "needs a cycle beside it", 'Write cycle = "step" or the like.')
    return rates[0], rates[1]


def _read_claims(table: Table) -> tuple[Claim, ...]:
    claims_table = table.table("claims", required=False)
    claims_table.check_keys((IMPROVES, SILENT, MAY_WORSEN))
    claims: dict[str, Claim] = {}
    for says in (IMPROVES, SILENT, MAY_WORSEN):
        for feature in claims_table.slugs(says, "feature"):
            if feature in claims:
                raise claims_table.complain(
                    says,
                    f"names {feature}, of which {claims[feature].says} is claimed already",
                    "A cue claims one thing of a feature.",
                )
            claims[feature] = Claim(feature, says)
    return tuple(claims.values())


def _read_wordings(table: Table) -> tuple[Wording, ...]:
    wordings: list[Wording] = []
    for entry in table.tables("wording"):
        entry.check_keys(("text", "language", "revision", "replaces"))
        wording = Wording(
            text=entry.text("text", required=True),
            language=entry.pattern("language", _LANGUAGE, "a BCP 47 tag such as en", default="en"),
            revision=entry.whole("revision", least=1) or 1,
            replaces=entry.whole("replaces", least=1),
        )
        _check_wording(wording, wordings, entry)
        wordings.append(wording)
    if not wordings:
        raise table.complain("wording", "is missing", "Give the words under [[cue.wording]].")
    return tuple(wordings)


def _check_wording(wording: Wording, earlier: Sequence[Wording], entry: Table) -> None:
    if _BRACES.search(wording.text.replace(SIDE_PLACE, "")):
        raise entry.complain("text", "has a brace that is not {side}", "Only {side} is filled in.")
    same = {other.revision for other in earlier if other.language == wording.language}
    if wording.revision in same:
        raise entry.complain(
            "revision", f"{wording.revision} is there twice in {wording.language}", "Count on."
        )
    if wording.replaces is not None and wording.replaces not in same:
        raise entry.complain(
            "replaces", f"names revision {wording.replaces}, which does not stand before it",
            "Put the older wording first.",
        )  # fmt: skip


def _check_codes(cues: Sequence[Cue], root: Table) -> None:
    """Check that codes are unique and sisters exist, over the whole set."""
    seen: dict[str, int] = {}
    tables = root.tables("cue")
    for i, cue in enumerate(cues):
        if cue.code in seen:
            raise tables[i].complain(
                "code", f"'{cue.code}' is there twice", "Give it another code."
            )
        seen[cue.code] = i
    for i, cue in enumerate(cues):
        if cue.sister_of is not None and cue.sister_of not in seen:
            raise tables[i].complain_unknown("sister_of", cue.sister_of, "cue of this set", seen)
