"""Whatever stands in a file, loading ends in a profile or in problems, never in a traceback."""

from __future__ import annotations

import tempfile
from pathlib import Path

from hypothesis import example, given, settings
from hypothesis import strategies as st

from cardgen.errors import DataError
from cardgen.profile import load_profile
from cardgen.profile.reading import read_tree
from cardgen.profile.starter import starter

# The starter profile with nothing left out: every shape of key is in it.
SOUND = {file: text.replace("\n#-", "\n") for file, text in starter("plane").items()}
FILES = tuple(SOUND)
PIECES = st.sampled_from(
    [
        "", ":", "-", "{", "}", "[", "]", "&a", "*a", "!x", "|", ">", "%", "@", "`", '"', "'",
        "\n", "\t", "  ", "#", "---\n", "?", "<<", "~", "null", "nan", "-1", "0", "1e999", "0 rpm",
        "none: x", "not measured", "9 inHg", "2400 rpm", "75 %", "../x", "é", "\u202e", "𝄞", "\x85",
    ]
)  # fmt: skip


def outcome(texts):
    """Load a profile of these texts; only DataError may come of it."""
    with tempfile.TemporaryDirectory() as folder:
        tree = Path(folder)
        for file, text in (SOUND | texts).items():
            (tree / file).parent.mkdir(exist_ok=True)
            (tree / file).write_text(text, encoding="utf-8")
        try:
            load_profile(tree / FILES[0])
        except DataError as error:
            problems = error.problems
        else:
            return
    assert problems
    for problem in problems:
        assert problem.found
        assert problem.file
        assert (problem.line > 0) == (problem.column > 0)


@settings(max_examples=150, deadline=None)
@given(
    st.sampled_from(FILES),
    st.integers(0, 20_000),
    st.integers(0, 40),
    st.lists(PIECES, max_size=4).map("".join),
)
def test_a_damaged_file_never_ends_in_a_traceback(file, start, length, piece):
    """A span of a sound file replaced by pieces that mean something to YAML or to us."""
    text = SOUND[file]
    start %= len(text)
    outcome({file: text[:start] + piece + text[start + length :]})


@settings(max_examples=150, deadline=None)
@given(st.sampled_from(FILES), st.integers(0, 200), st.integers(0, 200))
def test_lines_exchanged_or_lost_never_end_in_a_traceback(file, one, other):
    """Keys end up in sections and shapes they do not belong to."""
    lines = SOUND[file].splitlines(keepends=True)
    one, other = one % len(lines), other % len(lines)
    exchanged = list(lines)
    exchanged[one], exchanged[other] = lines[other], lines[one]
    outcome({file: "".join(exchanged)})
    outcome({file: "".join(lines[:one] + lines[one + 1 :])})
    outcome({file: "".join(lines[:one])})


@settings(max_examples=150, deadline=None)
@given(st.text(max_size=80))
@example("a: |\n")
@example("? a")
@example("{a}")
def test_any_text_is_read_or_refused(text):
    """The reader itself never raises."""
    document = read_tree(text, shown="x")
    assert document.root is not None or document.problems
