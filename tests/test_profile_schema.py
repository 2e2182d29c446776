"""The JSON Schema, the list of keys and the starter profile agree with what loading accepts."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest
import yaml

from cardgen.errors import UsageError
from cardgen.profile import load_profile
from cardgen.profile.keys import FILES, list_keys
from cardgen.profile.reading import read_tree
from cardgen.profile.schema import schema
from cardgen.profile.starter import starter

ROOT = Path(__file__).parent.parent
SOUND = Path(__file__).parent / "broken_profiles" / "sound"
FOLDERS = {"aircraft": "aircraft", "engine": "engines", "propeller": "propellers"}
KINDS = tuple(FILES)


class EditorLoader(yaml.SafeLoader):
    """Scalars as an editor of today sees them: YAML 1.2, where `yes` and dates are text."""


EditorLoader.yaml_implicit_resolvers = {}
EditorLoader.add_implicit_resolver("tag:yaml.org,2002:int", re.compile(r"[-+]?[0-9]+$"), None)
EditorLoader.add_implicit_resolver(
    "tag:yaml.org,2002:float", re.compile(r"[-+]?[0-9]*\.[0-9]+$"), None
)
EditorLoader.add_implicit_resolver("tag:yaml.org,2002:bool", re.compile("true$|false$"), None)

JSON_TYPES = {
    "object": dict,
    "array": list,
    "string": str,
    "number": (int, float),
    "integer": int,
    "boolean": bool,
}


def faults(value, rule, whole, path="$"):  # noqa: PLR0912 - a branch for each word of schemas
    """What a value breaks of the part of JSON Schema that the schemas use."""
    known = {
        "$ref", "$schema", "$defs", "title", "description", "default", "examples", "format",
        "type", "enum", "pattern", "maxLength", "minimum", "maximum", "anyOf", "oneOf",
        "properties", "required", "additionalProperties", "items", "minItems", "maxItems",
    }  # fmt: skip
    assert set(rule) <= known, set(rule) - known
    if "$ref" in rule:
        name = rule["$ref"].removeprefix("#/$defs/")
        yield from faults(value, whole["$defs"][name], whole, path)
    for word, enough in (("anyOf", lambda n: n >= 1), ("oneOf", lambda n: n == 1)):
        if word in rule:
            fitting = sum(not [*faults(value, one, whole, path)] for one in rule[word])
            if not enough(fitting):
                yield f"{path}: {fitting} of {word}"
    types = rule.get("type", ())
    types = [types] if isinstance(types, str) else types
    if types and not any(isinstance(value, JSON_TYPES[t]) for t in types):
        yield f"{path}: not {types}"
        return
    if "enum" in rule and value not in rule["enum"]:
        yield f"{path}: {value!r} not in enum"
    if "pattern" in rule and not re.search(rule["pattern"], value):
        yield f"{path}: {value!r} against pattern"
    if isinstance(value, str) and len(value) > rule.get("maxLength", 10**9):
        yield f"{path}: too long"
    if isinstance(value, int | float) and not (
        rule.get("minimum", value) <= value <= rule.get("maximum", value)
    ):
        yield f"{path}: out of bounds"
    if isinstance(value, dict):
        properties = rule.get("properties", {})
        yield from (
            f"{path}: {key} missing" for key in rule.get("required", ()) if key not in value
        )
        for key, inner in value.items():
            if key in properties:
                yield from faults(inner, properties[key], whole, f"{path}.{key}")
            elif rule.get("additionalProperties", True) is False:
                yield f"{path}: {key} unknown"
    if isinstance(value, list):
        if not rule.get("minItems", 0) <= len(value) <= rule.get("maxItems", 10**9):
            yield f"{path}: {len(value)} items"
        for entry in value:
            yield from faults(entry, rule.get("items", {}), whole, f"{path}[]")


def profile_files():
    """Every profile file of the demonstration and of the tests, with its kind."""
    return [
        (kind, path)
        for tree in (ROOT / "profiles", SOUND)
        for kind, folder in FOLDERS.items()
        for path in sorted((tree / folder).glob("*.yaml"))
        if not path.name.endswith(".fit.yaml")
    ]


@pytest.mark.parametrize(("kind", "path"), profile_files(), ids=lambda v: getattr(v, "stem", v))
def test_the_schema_accepts_what_loading_accepts(kind, path):
    """An editor marks nothing in a sound file."""
    rule = schema(kind)
    assert [*faults(yaml.load(path.read_text(), EditorLoader), rule, rule)] == []


@pytest.mark.parametrize(
    ("kind", "old", "new"),
    [
        ("aircraft", "wing_span", "wing_spam"),
        ("aircraft", "3000 lb", "3000"),
        ("aircraft", "gear: fixed", "gear: floats"),
        ("aircraft", "gear: fixed", "gear:"),
        ("aircraft", "percent_of: Continuous\n", ""),
        ("aircraft", "tachometer: not measured", "tachometer: unknown"),
        ("aircraft", "none: No speed limits.", "non: No speed limits."),
        ("engine", "8.5", "85"),
        ("engine", "power: 225 hp", "power: [225 hp]"),
        ("propeller", "blades: 2", "blades: two"),
        ("propeller", "kind: propeller", "kind: engine"),
    ],
)
def test_the_schema_refuses_mistakes_within_one_key(kind, old, new):
    """An editor marks them while one writes."""
    (path,) = (SOUND / FOLDERS[kind]).glob("*.yaml")
    text = path.read_text()
    assert old in text
    rule = schema(kind)
    assert [*faults(yaml.load(text.replace(old, new), EditorLoader), rule, rule)]


@pytest.mark.parametrize("kind", KINDS)
def test_the_schema_is_json_and_knows_no_null(kind):
    """A key without a value is a mistake in a profile."""
    text = json.dumps(schema(kind))
    assert json.loads(text) == schema(kind)
    assert "null" not in text


@pytest.mark.parametrize("kind", KINDS)
def test_every_key_is_documented(kind):
    """The README's table is made from this list."""
    keys = list_keys(kind)
    assert len({key.path for key in keys}) == len(keys)
    for key in keys:
        assert key.description, key.path
        assert key.value, key.path
        assert not key.description.endswith(".")
    assert keys[0].path == "kind"
    assert keys[0].value == kind


def test_the_list_of_keys_has_the_keys_that_files_use():
    """Spot checks by hand, one of each shape."""
    keys = {key.path: key for key in list_keys("aircraft")}
    assert keys["card.rpm[]"].required
    assert keys["card.rpm[]"].value.startswith("list, each a rotational speed such as")
    assert keys["limits.restricted_rpm[]"].value == "list; or mapping"
    assert keys["limits.restricted_rpm[].low"].required
    assert keys["limits.restricted_rpm.none"].required
    assert not keys["airframe.zero_lift_drag"].required
    assert keys["instruments.tachometer.points[].actual"].required


def written(folder, name, **options):
    """The path of a starter profile's aircraft file, and all its texts."""
    files = starter(name, **options)
    for path, text in files.items():
        (folder / path).parent.mkdir(parents=True, exist_ok=True)
        (folder / path).write_text(text, encoding="utf-8")
    return folder / next(iter(files)), files


@pytest.mark.parametrize("in_aircraft_folder", [True, False])
@pytest.mark.parametrize("name", ["my-plane", "Our plane", "it's"])
def test_the_starter_profile_loads(tmp_path, name, in_aircraft_folder):
    """It is marked as invented, and states or excludes every category of limits."""
    path, _ = written(tmp_path, name, in_aircraft_folder=in_aircraft_folder)
    profile = load_profile(path)
    assert profile.name == name
    assert profile.identity.demo


def test_every_key_that_the_starter_leaves_out_is_valid_where_it_stands(tmp_path):
    """Whoever takes a mark away gets a profile that loads."""
    path, files = written(tmp_path, "plane")
    assert sum(text.count("\n#-") for text in files.values()) >= 10
    for relative, text in files.items():
        (tmp_path / relative).write_text(text.replace("\n#-", "\n"), encoding="utf-8")
    assert len(load_profile(path).mixtures) == 4


def test_the_starter_shows_every_key(tmp_path):
    """What can be written can be found in the starter, each limit in the file it belongs to."""
    files = starter("plane")
    text = "\n".join(files.values())
    for kind in KINDS:
        for key in list_keys(kind):
            name = key.path.rpartition(".")[2].removesuffix("[]")
            assert re.search(rf"\b{name}\b", text), key.path


def test_the_starter_explains_itself_in_comments():
    """Every file has a heading and comments, and stays within the width of a page."""
    for text in starter("plane").values():
        assert text.startswith("# ")
        assert text.count("#") > 5
        assert max(map(len, text.splitlines())) <= 100
        assert read_tree(text, shown="x").problems == ()


@pytest.mark.parametrize("name", ["", "a/b", "..", ".hidden", 'say "x"', "a\nb", "a\\b", "{x}"])
def test_a_starter_with_an_impossible_name_is_refused(name):
    """The name becomes part of file names and references."""
    with pytest.raises(UsageError):
        starter(name)
