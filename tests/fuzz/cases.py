"""Cases: one command with one damaged input, in a folder of its own."""

from __future__ import annotations

import json
import random
import shutil
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Final

from .damage import damaged_table, damaged_text, damaged_tree, jittered, parsed, written

ROOT: Final = Path(__file__).parents[2]
AIRCRAFT: Final = "aircraft/specimen.yaml"
FILES: Final = (AIRCRAFT, "engines/specimen-e6-462.yaml", "propellers/specimen-p2-77.yaml")
OTHER_PROPELLER: Final = "propellers/specimen-p3-75.yaml"
SMALL: Final = "aircraft/small.yaml"
_ONE_CELL: Final = "card: {rpm: [2350 rpm], percent_powers: [65 %], altitudes: [6000 ft]}\n"
FIT: Final = "aircraft/specimen.fit.yaml"
HANDBOOK: Final = "aircraft/specimen-handbook.csv"


@dataclass(frozen=True, slots=True)
class Case:
    """One command in a folder `profiles`; `bad` says that its input is certain to be bad."""

    words: tuple[str, ...]
    what: str
    bad: bool = False
    readable: tuple[Path, ...] = ()
    writable: tuple[Path, ...] = ()
    then: tuple[str, ...] = ()  # a command that must succeed where this one did


@dataclass(slots=True)
class Bench:
    """A copy of the demonstration that is damaged and made good again, case by case."""

    folder: Path
    sound: dict[str, bytes] = field(default_factory=dict)

    @classmethod
    def at(cls, folder: Path) -> Bench:
        """Return a bench in an empty folder."""
        shutil.copytree(ROOT / "profiles", folder / "profiles")
        # Few rows fit as well as many for what is looked for here, and faster.
        book = folder / "profiles" / HANDBOOK
        lines = [line for line in book.read_text().splitlines() if not line.startswith("#")]
        book.write_text("\n".join([lines[0], *lines[1::9]]) + "\n")
        # A card of one cell says as much of a history as a whole one.
        head, _, _ = (ROOT / "profiles" / AIRCRAFT).read_text().partition("\ncard:\n")
        (folder / "profiles" / SMALL).write_text(f"{head}\n{_ONE_CELL}")
        whole = {
            str(path.relative_to(folder)): path.read_bytes()
            for path in folder.rglob("*")
            if path.is_file()
        }
        return cls(folder, whole)

    @property
    def profile(self) -> str:
        """Path of the aircraft file."""
        return str(self.folder / "profiles" / AIRCRAFT)

    def text(self, name: str) -> str:
        """Return the sound text of a file of the profile."""
        return self.sound[f"profiles/{name}"].decode()

    def put(self, name: str, text: str) -> Path:
        """Write a file of the profile, as bytes where the text is none."""
        path = self.folder / "profiles" / name
        path.write_bytes(text.encode("utf-8", "surrogateescape"))
        return path

    def keep(self, folder: Path) -> None:
        """Copy everything as it is."""
        shutil.copytree(self.folder, folder, symlinks=True, dirs_exist_ok=True)

    def restore(self) -> None:
        """Make everything as it was."""
        for path in sorted(self.folder.rglob("*"), reverse=True):
            name = str(path.relative_to(self.folder))
            if path.is_symlink() or (path.is_file() and name not in self.sound):
                path.unlink()
            elif path.is_dir() and not any(path.iterdir()):
                path.rmdir()
        for name, content in self.sound.items():
            path = self.folder / name
            path.parent.mkdir(parents=True, exist_ok=True)
            if not path.is_file() or path.read_bytes() != content:
                path.write_bytes(content)


def _computing(rng: random.Random, bench: Bench) -> tuple[tuple[str, ...], tuple[Path, ...]]:
    """Return a command that computes from the profile, and what it may write."""
    fit = rng.choice(((), ("--no-fit",)))
    here = ("--rpm", "2300,2450", "--percent", "60", "--altitude", "6000", "--isa", "0")
    out = bench.folder / "out"
    kind = rng.random()
    if kind < 0.35:
        given = ("--map", "22.5", "--rpm", "2350", "--altitude", "7000", "--oat", "3")
        return ("check", bench.profile, *given, *rng.choice(((), ("--json",))), *fit), ()
    if kind < 0.7:
        return ("table", bench.profile, *here, rng.choice(("--csv", "--json")), *fit), ()
    if kind < 0.8:
        return ("table", bench.profile, "--csv", *fit), ()
    if kind < 0.85:
        other = f"propeller={bench.folder / 'profiles' / OTHER_PROPELLER}"
        return ("compare", bench.profile, "--with", other, "--json", *fit), ()
    formats = rng.choice(("csv,json", "csv,json", "html", "pdf"))
    return ("make", bench.profile, "-o", str(out), "--format", formats, *fit), (out,)


def profile_text(rng: random.Random, bench: Bench) -> Case:
    """Return a command on a profile with a damaged text."""
    name = rng.choice(FILES)
    text = damaged_text(rng, bench.text(name))
    if rng.random() < 0.05:
        place = rng.randrange(len(text) + 1)
        text = text[:place] + chr(0xDC80 + rng.randrange(128)) + text[place:]  # a byte of no text
    bench.put(name, text)
    words, writable = _computing(rng, bench)
    return Case(words, f"text of {name}", readable=(bench.folder / "profiles",), writable=writable)


def profile_structure(rng: random.Random, bench: Bench) -> Case:
    """Return a command on a profile with one damaged node or number."""
    name = rng.choice(FILES)
    damaged = damaged_tree(rng, parsed(bench.text(name)))
    bench.put(name, written(damaged.tree))
    words, writable = _computing(rng, bench)
    return Case(
        words,
        f"{name}: {damaged.what}",
        bad=damaged.bad,
        readable=(bench.folder / "profiles",),
        writable=writable,
    )


def profile_numbers(rng: random.Random, bench: Bench) -> Case:
    """Return a command on a profile with many numbers a little off: odd, but often plausible."""
    for name in FILES:
        tree = parsed(bench.text(name))
        for _ in range(rng.randrange(8)):
            tree = jittered(rng, tree)
        bench.put(name, written(tree))
    words, writable = _computing(rng, bench)
    return Case(words, "numbers", readable=(bench.folder / "profiles",), writable=writable)


def points(rng: random.Random, bench: Bench) -> Case:
    """Return a fit to a damaged points file."""
    if rng.random() < 0.5:
        damaged = damaged_table(rng, bench.text(HANDBOOK))
        text, what, bad = str(damaged.tree), damaged.what, damaged.bad
    else:
        text, what, bad = damaged_text(rng, bench.text(HANDBOOK)), "text", False
    bench.put(HANDBOOK, text)
    fit = bench.folder / "profiles" / "new.fit.yaml"
    words = ("fit", bench.profile, "--out", str(fit), *rng.choice(((), ("--json",))))
    return Case(
        words,
        f"points: {what}",
        bad=bad,
        readable=(bench.folder / "profiles",),
        writable=(fit, fit.with_name(f".{fit.name}.part")),
        then=("table", bench.profile, "--fit", str(fit), "--rpm=2300", "--altitude=6000", "--csv"),
    )


def settings(rng: random.Random, bench: Bench) -> Case:
    """Return a check of a damaged file of settings."""
    head = "map_inhg,rpm,pressure_altitude_ft,oat_c,mixture,weight_lb"
    rows = [
        f"{rng.uniform(15, 27):.1f},{rng.uniform(1900, 2600):.0f},{rng.uniform(0, 14000):.0f},"
        f"{rng.uniform(-30, 30):.0f},{rng.choice(('Economy', 'best power', ''))},"
        f"{rng.choice(('', '2600', '2950'))}"
        for _ in range(rng.choice((1, 2, 8)))
    ]
    sound = "\n".join([head, *rows]) + "\n"
    if rng.random() < 0.6:
        damaged = damaged_table(rng, sound)
        text, what, bad = str(damaged.tree), damaged.what, damaged.bad
    else:
        text, what, bad = damaged_text(rng, sound), "text", False
    path = bench.put("aircraft/settings.csv", text)
    words = ("check", bench.profile, "--points", str(path), *rng.choice(((), ("--json",))))
    return Case(
        words, f"settings: {what}", bad=bad, readable=(bench.folder / "profiles",), writable=()
    )


def fit_file(rng: random.Random, bench: Bench) -> Case:
    """Return a command on a damaged fit file."""
    bad = False
    if rng.random() < 0.6:
        damaged = damaged_tree(rng, parsed(bench.text(FIT)))
        text, what, bad = written(damaged.tree), damaged.what, damaged.bad
    else:
        text, what = damaged_text(rng, bench.text(FIT)), "text"
    path = bench.put(FIT, text)
    here = ("--rpm", "2300,2450", "--percent", "60", "--altitude", "6000", "--isa", "0", "--csv")
    words = ("table", bench.profile, *here, *rng.choice(((), ("--fit", str(path)))))
    return Case(
        words, f"fit file: {what}", bad=bad, readable=(bench.folder / "profiles",), writable=()
    )


def history(rng: random.Random, bench: Bench) -> Case:
    """Return a card to be made into a folder whose history is damaged."""
    out = bench.folder / "out"
    issue = {
        "number": 1, "digest": "d" * 64, "content": "c" * 64, "parts": {"engine": "e" * 64},
        "replaces": None, "files": {"csv": "f" * 64}, "state": "released", "program": "p" * 64,
    }  # fmt: skip
    sound = json.dumps({"cards": {"small": [issue]}}, indent=1)
    if rng.random() < 0.6:
        tree = json.loads(sound)
        one = tree["cards"]["small"][0]
        odd: tuple[object, ...] = (
            None, [], {}, "x", -1, 1.5, True, [1], {"csv": None}, {"a": {}}, 10**400, ["csv"],
        )  # fmt: skip
        kind = rng.randrange(4)
        if kind == 0:
            one[rng.choice(list(one))] = rng.choice(odd)
        elif kind == 1:
            del one[rng.choice(list(one))]
        elif kind == 2:
            tree["cards"]["small"] = rng.choice((*odd, [one, one], [None], "issue"))
        else:
            tree["cards"] = rng.choice(odd)
        text = json.dumps(tree)
    else:
        text = damaged_text(rng, sound)
    out.mkdir(exist_ok=True)
    (out / "issues.json").write_text(text, encoding="utf-8", errors="surrogateescape")
    if rng.random() < 0.3:
        (out / "small.csv").write_text("an older card\n")
    profile = str(bench.folder / "profiles" / SMALL)
    words = ("make", profile, "-o", str(out), "--format", "csv")
    return Case(
        words, f"history: {text[:300]}", readable=(bench.folder / "profiles",), writable=(out,)
    )


_ODD: Final = (
    "", " ", "-", "--", "x", "nan", "inf", "-inf", "0", "-1", "1e999", "-1e999", "1e308", "1e-320",
    "9" * 400, "2400", "2400 rpm", "2400rpm", "2400 ft", "22", "22 inHg", "75", "75%", "3,4",
    "3,,4",
    "1:2:0", "1:2:-1", "2:1:1", "0:1e9:1e-9", "0:16000:2000", "::", "1:2", "1:2:3:4", "nan:2:1",
    "0:inf:1", "-40", "-273.15", "-300", "59degF", "400 K", "٢٤٠٠", "２４００", "1_000", "0x10",
    "\udcff", "é", "\u202e", "\n", "a\nb", "%s", "{0}", "../../../etc/passwd", "/", "/dev/null",
    "/dev/full", ".", "~", "x" * 300, "x" * 5000, "1000000", "-1000000", "1e6", "60000", "1,2,3",
)  # fmt: skip
_OPTIONS: Final[Mapping[str, tuple[str, ...]]] = {
    "check": ("--map", "--rpm", "--altitude", "--oat", "--mixture", "--weight", "--points",
              "--json", "--fit", "--no-fit"),
    "table": ("--rpm", "--percent", "--altitude", "--density-altitude", "--isa", "--weight",
              "--mixture", "--csv", "--json", "--fit", "--no-fit"),
    "make": ("-o", "--format", "--force", "--fit", "--no-fit"),
    "new": ("--schema", "--keys"),
    "fit": ("--points", "--out", "--json", "--accept-suspect"),
    "compare": ("--json", "--csv", "--mixture", "--rpm", "--altitude"),
}  # fmt: skip
_FLAGS: Final = frozenset({"--json", "--csv", "--no-fit", "--force", "--accept-suspect"})
_SOUND: Final[Mapping[str, str]] = {
    "--map": "22.5", "--rpm": "2350", "--altitude": "7000", "--oat": "3", "--mixture": "Economy",
    "--weight": "2800", "--percent": "60", "--isa": "0",
}  # fmt: skip
_IMPOSSIBLE: Final[Mapping[str, tuple[str, ...]]] = {
    "--map": ("nan", "inf", "-1", "1e9", "22 ft", "0"),
    "--rpm": ("nan", "inf", "-2400", "0", "1e9", "2400 ft"),
    "--altitude": ("nan", "inf", "1e9", "-1e9", "6000 kg"),
    "--oat": ("nan", "inf", "-300", "1e5", "5 kt"),
    "--weight": ("nan", "inf", "-2800", "0", "1e9", "1 ft"),
    "--percent": ("nan", "inf", "-5", "0", "1e9", "5 ft"),
    "--isa": ("nan", "inf", "-300", "1e5", "5 kt"),
    "--mixture": ("no such mixture", ""),
}
"""Values that no setting can have."""


def options(rng: random.Random, bench: Bench) -> Case:
    """Return a command with odd options."""
    command = rng.choice(("check", "check", "table", "table", "table", "make", "new", "fit"))
    if command in ("check", "table") and rng.random() < 0.4:
        return _impossible(rng, bench, command)
    odd = rng.choice(_ODD).replace("/", "").replace("\n", "")
    profile = bench.profile if rng.random() < 0.9 else odd.lstrip("-") or "x"
    if command == "new":
        profile = str(bench.folder / f"{odd}.yaml")
    out = str(bench.folder / "out")
    words = [
        command,
        *([profile] if command == "make" or rng.random() < 0.95 else []),
        *{
            "make": ["-o", out, "--format=csv"],
            "fit": [f"--out={bench.folder / 'new.fit.yaml'}"],
            "table": ["--rpm=2350", "--altitude=7000"],
            "check": ["--map=22.5", "--rpm=2350", "--altitude=7000"] * rng.choice((0, 1, 1, 1)),
            "new": [],
        }[command],
    ]
    for _ in range(rng.choice((1, 1, 2, 3))):
        words.append(_odd_option(rng, bench, rng.choice(_OPTIONS[command])))
        if rng.random() < 0.05 and command != "make":
            words.append(rng.choice(_ODD[:40]).replace("/", ""))
    writes = command in ("make", "new", "fit")
    return Case(
        tuple(words),
        "odd options",
        readable=(bench.folder,),
        writable=(bench.folder,) if writes else (),
    )


def _odd_option(rng: random.Random, bench: Bench, option: str) -> str:
    """Return an option with an odd value; a path stays in the bench."""
    if option in _FLAGS:
        return option
    value = rng.choice(_ODD)
    if option in ("--out", "-o"):
        value = str(bench.folder / value.replace("/", "").replace("..", "").replace("\n", ""))
    elif option in ("--fit", "--points"):
        value = value.replace("/", "").replace(".", "").replace("\n", "") or "x"
    return f"{option}={value}" if option.startswith("--") else f"{option}{value}"


def _impossible(rng: random.Random, bench: Bench, command: str) -> Case:
    """Return a command with one value that cannot be."""
    given = ("--map", "--rpm", "--altitude") if command == "check" else ("--rpm", "--altitude")
    wrong = rng.choice([option for option in _IMPOSSIBLE if option in _OPTIONS[command]])
    words = [
        f"{option}={rng.choice(_IMPOSSIBLE[wrong]) if option == wrong else _SOUND[option]}"
        for option in dict.fromkeys((*given, wrong))
    ]
    words += rng.choice(((), ("--json",)))
    return Case(
        (command, bench.profile, *words),
        f"{wrong} impossible",
        bad=True,
        readable=(bench.folder,),
    )


KINDS: Final[Mapping[str, Callable[[random.Random, Bench], Case]]] = {
    "profile text": profile_text,
    "profile structure": profile_structure,
    "profile numbers": profile_numbers,
    "points": points,
    "settings": settings,
    "fit file": fit_file,
    "history": history,
    "options": options,
}
"""What is damaged, and how a case of it is made."""
