"""Commands run under watch: their time, their output, and every file they touch."""

from __future__ import annotations

import contextlib
import csv
import io
import json
import os
import re
import signal
import sys
import sysconfig
import traceback
import warnings
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

import cardgen
from cardgen.cli.main import run
from cardgen.tables.rows import COLUMNS

MOST_SECONDS: Final = 5.0
"""Processor time that one command may take on input of the demonstration's size."""

_LINE: Final = re.compile(r"[^\n]+?(:\d+:\d+)?: \S.*")
_PROGRAM: Final = tuple(
    os.path.realpath(folder) + os.sep
    for folder in (
        Path(cardgen.__file__).parent,
        sysconfig.get_path("stdlib"),
        sysconfig.get_path("purelib"),
        sys.base_prefix,
        sys.prefix,
    )
)
# ReportLab looks for its own settings in the home folder when it is imported.
_LIBRARY_SETTINGS: Final = (".reportlab_settings", ".reportlab_mods")
_WRITING: Final = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC | os.O_APPEND
_CHANGES: Final = {
    "os.remove": 1, "os.rename": 2, "os.mkdir": 1, "os.rmdir": 1, "os.link": 2, "os.symlink": 2,
    "os.truncate": 1, "os.chmod": 1, "os.chown": 1, "os.utime": 1,
}  # fmt: skip
_NEVER: Final = ("subprocess.", "os.system", "os.exec", "os.posix_spawn", "socket.", "urllib.")


class TooSlowError(BaseException):
    """The time of a command is up."""


@dataclass(slots=True)
class Touched:
    """Files that were opened or changed while a command ran."""

    read: set[str] = field(default_factory=set)
    changed: set[str] = field(default_factory=set)
    other: set[str] = field(default_factory=set)


_now: Touched | None = None
_installed = False


def _heed(event: str, arguments: tuple[Any, ...]) -> None:
    """Note what the interpreter says it is about to do; hooks cannot be taken away again."""
    if _now is None:
        return
    if event == "open":
        path, _, flags = arguments
        if isinstance(path, int):
            return
        name = os.path.realpath(os.fsdecode(path))
        (_now.changed if (flags or 0) & _WRITING else _now.read).add(name)
    elif event in _CHANGES:
        for path in arguments[: _CHANGES[event]]:
            if not isinstance(path, int):
                text = os.fsdecode(path)
                # The link itself is changed, not what it points to.
                folder = os.path.realpath(os.path.dirname(text) or ".")
                _now.changed.add(os.path.join(folder, os.path.basename(text)))
    elif event.startswith(_NEVER):
        _now.other.add(event)


@contextlib.contextmanager
def touching() -> Iterator[Touched]:
    """Note every file that is opened or changed meanwhile.

    Yields
    ------
    Touched
        Filled while the block runs [-]
    """
    global _now, _installed  # noqa: PLW0603 - an audit hook stays for good and needs a place
    if not _installed:
        sys.addaudithook(_heed)
        _installed = True
    touched = _now = Touched()
    try:
        yield touched
    finally:
        _now = None


@contextlib.contextmanager
def _in_time(seconds: float) -> Iterator[None]:
    """Raise when the processor time is up."""

    def stop(_signal: int, _frame: object) -> None:
        raise TooSlowError

    before = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0.0)
        signal.signal(signal.SIGPROF, before)


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a command said and did; `escaped` is the traceback of what it let through."""

    words: tuple[str, ...]
    code: int
    out: str
    err: str
    escaped: str
    touched: Touched


def watched(words: Sequence[str], *, seconds: float = MOST_SECONDS) -> Outcome:
    """Run a command in this process; every warning is an error.

    Parameters
    ----------
    words : sequence of str
        The words after the program's name [-]
    seconds : float
        Processor time it may take [s]

    Returns
    -------
    Outcome
        What came of it [-]
    """
    # Bytes under the text, as a real terminal has them: what cannot be encoded must show.
    out = io.TextIOWrapper(io.BytesIO(), encoding="utf-8", write_through=True)
    err = io.TextIOWrapper(
        io.BytesIO(), encoding="utf-8", errors="backslashreplace", write_through=True
    )
    code, escaped = -1, ""
    with (
        contextlib.redirect_stdout(out),
        contextlib.redirect_stderr(err),
        touching() as touched,
        warnings.catch_warnings(),
    ):
        warnings.simplefilter("error")
        try:
            with _in_time(seconds):
                code = run(list(words))
        except TooSlowError:
            escaped = f"more than {seconds} s of processor time"
        except BaseException:  # what gets through is what is looked for
            escaped = "\n".join(traceback.format_exc().splitlines()[-9:])
    said = []
    for stream in (out, err):
        with contextlib.suppress(ValueError):
            stream.flush()
        raw = stream.buffer
        said.append("" if raw.closed else raw.getvalue().decode())  # type: ignore[attr-defined]
    return Outcome(tuple(words), code, said[0], said[1], escaped, touched)


def tree_of(folder: Path) -> dict[str, bytes]:
    """Return the content of every file in a folder, links as what they point to.

    Parameters
    ----------
    folder : Path
        The folder [-]

    Returns
    -------
    dict
        Content by path [-]
    """
    found = {}
    for path in folder.rglob("*"):
        if path.is_symlink():
            found[str(path)] = b"-> " + os.fsencode(os.readlink(path))
        elif path.is_file():
            found[str(path)] = path.read_bytes()
    return found


def objections(
    outcome: Outcome,
    *,
    bad: bool,
    readable: Sequence[Path],
    writable: Sequence[Path],
) -> list[str]:
    """Return what is wrong with what a command did.

    Parameters
    ----------
    outcome : Outcome
        What it said and did [-]
    bad : bool
        Whether its input is certain to be bad [-]
    readable : sequence of Path
        Folders and files it may read [-]
    writable : sequence of Path
        Folders and files it may change [-]

    Returns
    -------
    list of str
        Nothing where all is well [-]
    """
    found = list(_of_exit(outcome, bad=bad))
    found += _of_files(outcome, readable, writable)
    if not found and outcome.code in (0, 1):
        found += _of_numbers(outcome)
    return found


def _of_exit(outcome: Outcome, *, bad: bool) -> Iterator[str]:
    """Yield what is wrong with exit code, stdout and stderr."""
    many = "--points" in outcome.words and outcome.words[0] == "check"
    if outcome.escaped:
        yield f"let through: {outcome.escaped}"
        return
    allowed = {0, 2, 3, 4} | ({1} if outcome.words[0] == "check" else set())
    if outcome.code not in allowed:
        yield f"exit code {outcome.code}"
    if bad and outcome.code in (0, 1):
        yield f"exit code {outcome.code} on bad input"
    if "Traceback" in outcome.err or "Warning:" in outcome.err:
        yield "a traceback or a warning on stderr"
    refused = outcome.code in (2, 3) or (outcome.code == 4 and not many)
    if refused and outcome.out:
        yield "something on stdout although the command failed"
    if refused and not outcome.err.strip():
        yield "failed without a word"
    if outcome.code == 3 and not all(map(_LINE.fullmatch, outcome.err.splitlines())):
        yield "a line on stderr that does not say where"


def _of_files(
    outcome: Outcome, readable: Sequence[Path], writable: Sequence[Path]
) -> Iterator[str]:
    """Yield files that were none of the command's business."""
    touched = outcome.touched
    mine = [os.path.realpath(path) for path in writable]
    given = [*mine, *(os.path.realpath(path) for path in readable)]

    def within(name: str, among: Sequence[str]) -> bool:
        return any(name == path or name.startswith(path + os.sep) for path in among)

    for name in sorted(touched.read):
        own = name.startswith(_PROGRAM) or os.path.basename(name) in _LIBRARY_SETTINGS
        if not within(name, given) and not own and name != os.devnull:
            yield f"read {name}"
    for name in sorted(touched.changed):
        if not within(name, mine) and "__pycache__" not in name:
            yield f"changed {name}"
    for event in sorted(touched.other):
        yield f"did {event}"


def _of_numbers(outcome: Outcome) -> Iterator[str]:
    """Yield numbers on stdout that cannot be."""
    words = outcome.words
    rows: list[Mapping[str, Any]] = []
    try:
        if "--csv" in words:
            rows = list(csv.DictReader(io.StringIO(outcome.out)))
            if words[0] == "table" and outcome.out.splitlines()[0] != ",".join(COLUMNS):
                yield "another header than agreed"
        elif "--json" in words:
            read = json.loads(outcome.out, parse_constant=_refuse)
            rows = read if isinstance(read, list) else [read]
    except (ValueError, IndexError) as error:
        yield f"stdout is not what was asked for: {error}"
        return
    for row in rows:
        for name, value in row.items():
            yield from _of_number(name, value, ok=row.get("status", "ok") == "ok")


def _refuse(word: str) -> None:
    raise ValueError(f"{word} in JSON")


_POSSIBLE: Final = {
    "percent_power": (0.0, 200.0),
    "power_hp": (0.0, 3000.0),
    "manifold_pressure_inhg": (0.0, 60.0),
    "full_throttle_map_inhg": (0.0, 60.0),
    "fuel_flow_gph": (0.0, 300.0),
    "true_airspeed_kt": (0.0, 700.0),
    "calibrated_airspeed_kt": (0.0, 700.0),
    "propeller_efficiency": (0.0, 1.0),
    "rpm": (300.0, 8000.0),
    "weight_lb": (200.0, 60_000.0),
    "pressure_altitude_ft": (-20_000.0, 60_000.0),
}
"""What no light piston aeroplane goes beyond. Common practice, no source."""


def _of_number(name: str, value: object, *, ok: bool) -> Iterator[str]:
    """Yield what is wrong with one number."""
    if name not in _POSSIBLE:
        return
    if value in (None, ""):
        if ok and value == "" and name in ("power_hp", "true_airspeed_kt", "fuel_flow_gph"):
            yield f"{name} is empty in a row that is ok"
        return
    number = float(str(value))
    least, greatest = _POSSIBLE[name]
    if not least <= number <= greatest:
        yield f"{name} is {number!r}"
