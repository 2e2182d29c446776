"""Files that are no profiles, or are meant to harm: refused quickly, with a message."""

from __future__ import annotations

import os
import shutil
import time
from pathlib import Path

import pytest

from cardgen.errors import DataError
from cardgen.profile import load_profile
from cardgen.profile.reading import read_document, read_tree

SOUND = Path(__file__).parent / "broken_profiles" / "sound"


def problems_of(path):
    """The problems that loading reports, as printed."""
    with pytest.raises(DataError) as caught:
        load_profile(path)
    return [str(problem) for problem in caught.value.problems]


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """An empty folder, the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


BOMB = b"a: &a [x, x, x, x, x, x, x, x, x]\n" + b"".join(
    b"%c: &%c [*%c, *%c, *%c, *%c, *%c, *%c, *%c, *%c, *%c]\n" % (n, n, *[n - 1] * 9)
    for n in range(ord("b"), ord("k"))
)

FILES = {
    "an empty file": (b"", "x.yaml: is empty, expected a profile such as `cardgen new` makes"),
    "comments only": (
        b"# nothing\n\n# here\n",
        "x.yaml: is empty, expected a profile such as `cardgen new` makes",
    ),
    "a document without content": (
        b"---\n...\n",
        "x.yaml: is empty, expected a profile such as `cardgen new` makes",
    ),
    "ten megabytes": (
        b"x" * 10_000_000,
        "x.yaml: is larger than 1000000 bytes, expected a file of at most 1 MB",
    ),
    "Latin-1": (
        "kind: aircraft\noperator: Kärnten\n".encode("latin-1"),
        "x.yaml:2:12: byte 0xE4 is not UTF-8 text, expected a file saved as UTF-8",
    ),
    "UTF-16": (
        "kind: aircraft\n".encode("utf-16"),
        "x.yaml:1:1: byte 0xFF is not UTF-8 text, expected a file saved as UTF-8",
    ),
    "a null character": (
        b"kind: aircraft\nab\x00: 1\n",
        "x.yaml:2:3: control character U+0000 in the text, expected printable text only",
    ),
    "a picture": (
        b"\x89PNG\r\n\x1a\n",
        "x.yaml:1:1: byte 0x89 is not UTF-8 text, expected a file saved as UTF-8",
    ),
    "aliases of aliases": (
        BOMB,
        "x.yaml:2:8: b[1]: alias *a is not allowed, expected the value written out",
    ),
    "a mapping that holds itself": (
        b"kind: aircraft\ncard: &c\n  rpm: *c\n",
        "x.yaml:3:8: card.rpm: alias *c is not allowed, expected the value written out",
    ),
    "a list nested without end": (
        b"- " * 400_000,
        "x.yaml:1:27: nested more than 12 levels deep",
    ),
    "a mapping nested without end": (
        b"{a: " * 200_000,
        "x.yaml:1:50: nested more than 12 levels deep",
    ),
    "more values than any profile": (
        b"a: [" + b"x," * 400_000 + b"]",
        # the root, a key, a list and 9997 entries, the first in column 5: the next in 5 + 2 × 9997
        "x.yaml:1:19999: more than 10000 values in one file",
    ),
    "a quotation without end": (
        b'a: "' + b"b: " * 300_000,
        "x.yaml:1:900005: is not YAML: while scanning a quoted scalar found unexpected end of "
        "stream, expected YAML as `cardgen new` writes it",
    ),
}


@pytest.mark.parametrize("case", FILES)
def test_a_hostile_file_is_refused_with_its_reason(folder, case):
    """Size, depth, number of values and expansion are bounded before anything is built."""
    data, expected = FILES[case]
    Path("x.yaml").write_bytes(data)
    began = time.perf_counter()
    problems = problems_of("x.yaml")
    assert problems == [expected]
    assert time.perf_counter() - began < 2.0


def test_brackets_without_end_are_refused(folder):
    """Whichever bound strikes first, the parser's or ours, ends in one message."""
    Path("x.yaml").write_bytes(b"[" * 900_000)
    (problem,) = problems_of("x.yaml")
    assert problem.startswith("x.yaml:1:")
    assert "nest" in problem


@pytest.mark.parametrize("text", ["just words", "- a\n- b\n", "42"])
def test_a_file_that_is_no_mapping_is_refused(folder, text):
    """A profile is a mapping of keys."""
    Path("x.yaml").write_text(text)
    (problem,) = problems_of("x.yaml")
    assert problem.startswith("x.yaml:1:1: ")
    assert "expected a mapping with keys among kind, format, demo" in problem


def test_what_is_not_a_file_is_refused(folder):
    """Folders, pipes and devices are not opened; a pipe would wait for ever."""
    os.mkdir("folder.yaml")
    os.mkfifo("pipe.yaml")
    assert problems_of("folder.yaml") == ["folder.yaml: is a folder, expected a YAML file"]
    assert problems_of("pipe.yaml") == ["pipe.yaml: is not a regular file, expected a YAML file"]
    assert problems_of("/dev/zero") == ["/dev/zero: is not a regular file, expected a YAML file"]
    assert problems_of("none.yaml") == ["none.yaml: does not exist, expected an existing YAML file"]
    assert problems_of("a\0b") == ["a\0b: is not a file name"]


def test_a_hostile_part_file_is_refused_like_a_hostile_aircraft(folder):
    """Part files are read with the same bounds, and named as seen from the user's folder."""
    shutil.copytree(SOUND, "fleet")
    Path("fleet/engines/six.yaml").write_bytes(b"x" * 2_000_000)
    Path("fleet/propellers/two.yaml").write_bytes(b"")
    assert problems_of("fleet/aircraft/plane.yaml") == [
        "fleet/engines/six.yaml: is larger than 1000000 bytes, expected a file of at most 1 MB",
        "fleet/propellers/two.yaml: is empty, expected a profile such as `cardgen new` makes",
    ]


def test_a_byte_order_mark_is_not_a_mistake(folder):
    """Some editors write one at the start of UTF-8."""
    Path("x.yaml").write_bytes("\ufeffkind: aircraft\n".encode())
    document = read_document(Path("x.yaml"), shown="x.yaml")
    assert document.problems == ()
    assert document.root.text("kind") == "aircraft"


@pytest.mark.parametrize(
    "word", ["no", "on", "yes", "0123", "1_000", "1:30", "0x1F", ".inf", "2026-03-14", "1e3"]
)
def test_a_scalar_stays_the_text_it_was_written_as(word):
    """YAML 1.1 would make booleans, octal and sexagesimal numbers and dates of these."""
    assert read_tree(f"a: {word}\n", shown="x").root.text("a") == word


def test_the_slow_parser_builds_the_same_tree(monkeypatch):
    """Where PyYAML is built without libyaml, places and texts are the same."""
    import yaml  # noqa: PLC0415 - only this test swaps the parser

    texts = [path.read_text() for path in sorted(SOUND.rglob("*.yaml"))]
    fast = [read_tree(text, shown="x") for text in texts]
    monkeypatch.setattr("cardgen.profile.reading._LOADER", yaml.SafeLoader)
    assert [read_tree(text, shown="x") for text in texts] == fast
