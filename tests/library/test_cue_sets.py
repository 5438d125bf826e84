from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import InputError
from cuebook.library.cue_reader import parse_cue_set, read_cue_set
from cuebook.library.cue_writer import format_cue_set, write_cue_set
from cuebook.library.cues import Claim, Cue, CueSet, Wording
from cuebook.library.seed_sets import find_seed_folder, load_seed_cues, load_seed_sets
from cuebook.library.toml_lines import map_lines
from cuebook.vocabulary import load_vocabulary

VOCABULARY = load_vocabulary()
SMALL_SET = """format = "cuebook.cues/1"

[set]
code = "hall"
title = "Hall"

[[cue]]
code = "long-step"
kind = "explicit_rule"
focus = "internal"
tasks = ["walking"]
regions = [
  "leg",
  "foot",
]

[cue.claims]
improves = ["step_length"]

[[cue.wording]]
text = "Take a longer step."

[[cue]]
code = "far-tree"
kind = "analogy"
focus = "external_distal"
sister_of = "long-step"

[[cue.wording]]
text = "Walk to the far tree."
"""

plain_texts = st.text(
    st.characters(exclude_categories=("Cs", "Cc"), exclude_characters="{}"), min_size=1, max_size=30
).filter(str.strip)
codes = st.from_regex(r"[a-z0-9]{1,8}(-[a-z0-9]{1,5}){0,2}", fullmatch=True)


def some_of(list_name: str) -> st.SearchStrategy[tuple[str, ...]]:
    """Return a strategy for a few different slugs of a list."""
    slugs = st.sampled_from(VOCABULARY.slugs(list_name))
    return st.lists(slugs, max_size=3, unique=True).map(tuple)


@st.composite
def build_cues(draw: st.DrawFn) -> Cue:
    """Return a cue of any shape that a set may hold."""
    features = draw(some_of("feature"))
    says = ["improves", "silent", "may_worsen"]
    low = draw(st.none() | st.floats(min_value=0.5, max_value=200))
    return Cue(
        code=draw(codes),
        kind=draw(st.sampled_from(VOCABULARY.slugs("cue_kind"))),
        focus=draw(st.sampled_from(VOCABULARY.slugs("focus"))),
        wordings=tuple(
            Wording(draw(plain_texts), "en", i + 1, i or None)
            for i in range(draw(st.integers(min_value=1, max_value=3)))
        ),
        tasks=draw(some_of("task")),
        regions=draw(some_of("region")),
        claims=tuple(Claim(feature, said) for feature, said in zip(features, says, strict=False)),
        pair=draw(st.just("") | plain_texts),
        status=draw(st.sampled_from(VOCABULARY.slugs("cue_status"))),
        problem=draw(st.just("") | plain_texts),
        phrases=tuple(draw(st.lists(plain_texts, max_size=4))),
        cycle=None if low is None else "step",
        rate_low=low,
        rate_high=None if low is None else low + draw(st.floats(min_value=0, max_value=50)),
        age_low=draw(st.none() | st.integers(min_value=0, max_value=40)),
        age_high=draw(st.none() | st.integers(min_value=40, max_value=99)),
        experience=draw(some_of("experience")),
        background_good=draw(some_of("background")),
        background_avoid=draw(some_of("background")),
        access_avoid=draw(some_of("access_need")),
        note_avoid=draw(some_of("safety_note")),
        captures=draw(st.just("") | plain_texts),
        leaves_out=draw(st.just("") | plain_texts),
        caution=draw(st.just("") | plain_texts),
        target_metric=draw(st.sampled_from([None, "sparc"])),
        watch_metric=draw(st.sampled_from([None, "movement_time_s"])),
    )


cue_sets = st.builds(
    CueSet,
    code=codes,
    title=plain_texts,
    cues=st.lists(build_cues(), max_size=3, unique_by=lambda cue: cue.code).map(tuple),
    about=st.just("") | plain_texts,
    language=st.sampled_from(["en", "es-419", "zh-Hant"]),
)


@given(cue_sets)
def test_what_is_written_is_read_back_and_written_again_the_same(cue_set: CueSet) -> None:
    """Writing, reading and writing again gives the same set and the same bytes."""
    written = format_cue_set(cue_set)
    read = parse_cue_set(written, "set.toml")
    assert read == cue_set
    assert format_cue_set(read).encode() == written.encode()


@given(cue_sets, st.integers(min_value=0, max_value=4000), st.characters(codec="utf-8"))
def test_a_damaged_set_gives_a_set_or_an_input_error_and_nothing_else(
    cue_set: CueSet, at: int, letter: str
) -> None:
    """One wrong letter anywhere is either harmless or an error with a line of the file."""
    written = format_cue_set(cue_set)
    at = min(at, len(written) - 1)
    damaged = written[:at] + letter + written[at + 1 :]
    complaint: InputError | None = None
    try:
        parse_cue_set(damaged, "set.toml")
    except InputError as error:
        complaint = error
    assert complaint is None or (complaint.place.file == "set.toml" and complaint.hint)


@given(cue_sets)
def test_every_cut_short_set_is_refused_or_shorter(cue_set: CueSet) -> None:
    """A file that ends too early never gives more than it holds."""
    written = format_cue_set(cue_set)
    cut = written[: len(written) // 2]
    try:
        read = parse_cue_set(cut, "set.toml")
    except InputError:
        return
    assert len(read.cues) <= len(cue_set.cues)


@pytest.mark.parametrize(
    ("old", "new", "line", "field", "said"),
    [
        ('kind = "explicit_rule"', 'kind = "explicit_rul"', 9, "kind", "explicit_rule"),
        ('  "foot",', '  "fot",', 14, "regions", "foot"),
        ('["step_length"]', '["step_lenght"]', 18, "improves", "step_length"),
        ('["walking"]', '"walking"', 11, "tasks", "list of texts"),
        ('focus = "internal"', 'focsu = "internal"', 10, "focsu", "focus"),
        ('text = "Take a longer step."', 'text = ""', 21, "text", "missing"),
        ('text = "Take a longer step."', 'text = "To {hand}"', 21, "text", "{side}"),
        ('sister_of = "long-step"', 'sister_of = "long-stop"', 27, "sister_of", "long-step"),
        ('code = "far-tree"', 'code = "long-step"', 24, "code", "twice"),
        ('code = "far-tree"', 'code = "Far Tree"', 24, "code", "hyphens"),
        ('tasks = ["walking"]', 'tasks = ["walking"]\nrate = [80, 70]', 12, "rate", "lower first"),
        ('tasks = ["walking"]', 'tasks = ["walking"]\nrate = [70, 80]', 12, "rate", "cycle"),
        ('tasks = ["walking"]', 'tasks = ["walking"]\nproblem = 3', 12, "problem", "quotes"),
        ('title = "Hall"', 'title = "Ha\\nll"', 5, "title", "line break"),
        ('format = "cuebook.cues/1"', 'format = "cuebook.cues/9"', 1, "format", "cuebook.cues/1"),
    ],
)
def test_a_wrong_field_is_named_with_its_line(
    old: str, new: str, line: int, field: str, said: str
) -> None:
    """The error of a damaged set names the file, the line, the field and the way out."""
    assert old in SMALL_SET
    with pytest.raises(InputError) as caught:
        parse_cue_set(SMALL_SET.replace(old, new, 1), "hall.toml")
    error = caught.value
    assert (error.place.file, error.place.row, error.place.column) == ("hall.toml", line, field)
    assert said in f"{error.message} {error.hint}"
    assert f"Line {line} of hall.toml" in error.message


def test_broken_toml_is_named_with_its_line() -> None:
    """A missing quote is reported on its line."""
    with pytest.raises(InputError) as caught:
        parse_cue_set(SMALL_SET.replace('code = "hall"', 'code = "hall'), "hall.toml")
    assert caught.value.place.row == 4


def test_missing_tables_are_named() -> None:
    """A set without its heading, or a cue without words, says what to write."""
    with pytest.raises(InputError, match="set is missing"):
        parse_cue_set('format = "cuebook.cues/1"\n', "hall.toml")
    without_words = SMALL_SET.split("[[cue.wording]]", maxsplit=1)[0]
    with pytest.raises(InputError, match="wording is missing"):
        parse_cue_set(without_words, "hall.toml")


def test_wordings_must_follow_one_another() -> None:
    """A revision stands once, and replaces one that stands before it."""
    second = '\n[[cue.wording]]\ntext = "Step on."\nrevision = {}\n{}'
    with pytest.raises(InputError, match="twice"):
        parse_cue_set(SMALL_SET + second.format(1, ""), "hall.toml")
    with pytest.raises(InputError, match="names revision 4"):
        parse_cue_set(SMALL_SET + second.format(2, "replaces = 4\n"), "hall.toml")
    read = parse_cue_set(SMALL_SET + second.format(2, "replaces = 1\n"), "hall.toml")
    assert read.cues[1].wording().text == "Step on."
    assert read.cues[1].wording("en", 1).text == "Walk to the far tree."


def test_one_feature_cannot_be_claimed_two_ways() -> None:
    """A cue cannot say that it improves and worsens the same feature."""
    twice = SMALL_SET.replace(
        'improves = ["step_length"]', 'improves = ["speed"]\nmay_worsen = ["speed"]'
    )
    with pytest.raises(InputError, match="speed"):
        parse_cue_set(twice, "hall.toml")


def test_files_that_cannot_be_read_are_input_errors(tmp_path: Path) -> None:
    """A missing file, a folder and a file in another encoding each say so."""
    latin = tmp_path / "latin.toml"
    latin.write_bytes('format = "pli\xe9"'.encode("latin-1"))
    for path in (tmp_path / "none.toml", tmp_path, latin):
        with pytest.raises(InputError) as caught:
            read_cue_set(path)
        assert caught.value.place.file == str(path)


def test_a_set_is_written_whole_and_read_from_its_file(tmp_path: Path) -> None:
    """Writing replaces the old file at once and leaves nothing beside it."""
    path = tmp_path / "hall.toml"
    path.write_text("old", encoding="utf-8")
    read = parse_cue_set(SMALL_SET, "hall.toml")
    write_cue_set(read, path)
    assert read_cue_set(path) == read
    assert [file.name for file in tmp_path.iterdir()] == ["hall.toml"]


def test_a_set_that_could_not_be_read_back_is_not_written(tmp_path: Path) -> None:
    """An unknown slug is refused at writing, and the old file stays as it was."""
    path = tmp_path / "hall.toml"
    path.write_text("old", encoding="utf-8")
    cue = Cue("a", "no_such_kind", "internal", (Wording("Step."),))
    with pytest.raises(InputError):
        write_cue_set(CueSet("hall", "Hall", (cue,)), path)
    assert path.read_text(encoding="utf-8") == "old"
    assert [file.name for file in tmp_path.iterdir()] == ["hall.toml"]


def test_windows_line_ends_are_read() -> None:
    """A set saved with CR LF is the same set."""
    assert parse_cue_set(SMALL_SET.replace("\n", "\r\n"), "a") == parse_cue_set(SMALL_SET, "a")


def test_the_nearest_language_of_a_wording_is_chosen() -> None:
    """Tags are shortened from the right, as in the lookup of RFC 4647 section 3.4."""
    cue = Cue(
        "a",
        "keyword",
        "holistic",
        tuple(Wording(tag, tag) for tag in ("zh-Hant", "en", "es-419", "zh-Hant-TW")),
    )
    # "zh-Hant-CN-x-private1-private2" is the RFC's own example of shortening (from memory).
    assert cue.wording("zh-Hant-CN-x-private1-private2").language == "zh-Hant"
    assert cue.wording("zh-hant-tw").language == "zh-Hant-TW"
    assert cue.wording("es").language == "es-419"
    assert cue.wording("en-GB").language == "en"
    assert cue.wording("fr").language == "zh-Hant"


def test_lines_inside_long_strings_are_no_headings() -> None:
    """What looks like a key or heading inside a multi-line string is text."""
    text = 'a = """\n[b]\nc = 1\n"""\nd = 2\n'
    assert tomllib.loads(text)["d"] == 2
    assert dict(map_lines(text).by_path) == {("a",): 1, ("d",): 5}


def test_the_seed_sets_are_whole() -> None:
    """The three seed sets load, with unique codes, a rule beside each image, and known sisters."""
    sets = load_seed_sets()
    assert [cue_set.code for cue_set in sets] == ["larkspur-lane", "quillgate", "tern-weir"]
    cues = load_seed_cues()
    assert len(cues) == 76
    assert len({cue.code for cue in cues}) == 76
    pairs = {cue.pair for cue in cues}
    assert len(pairs) == 30
    for pair in pairs:
        kinds = {cue.kind for cue in cues if cue.pair == pair}
        assert "analogy" in kinds
        assert len(kinds) > 1
    assert all(cue.features and cue.tasks and cue.caution for cue in cues)


def test_the_seed_files_are_written_as_the_writer_writes() -> None:
    """Each seed file is exactly what writing its set gives."""
    for cue_set, file in zip(
        load_seed_sets(), sorted(find_seed_folder().iterdir(), key=lambda f: f.name), strict=True
    ):
        assert format_cue_set(cue_set) == file.read_text(encoding="utf-8")


def test_seed_wordings_are_short_and_positive() -> None:
    """A seed cue is said in 4 to 12 words and tells what to do."""
    for cue in load_seed_cues():
        words = cue.wording().text.split()
        assert 4 <= len(words) <= 12, cue.code
        assert not {"don't", "try", "never"} & {word.lower() for word in words}, cue.code
