"""JSON Schema of the three kinds of file, for editors that check while one writes."""

from __future__ import annotations

from typing import Any

from cardgen.profile.keys import FILES, Kind

_JSON_TYPES = {"string": str, "number": int | float, "integer": int}


def schema(kind: Kind) -> dict[str, Any]:
    """Return the JSON Schema of one kind of file.

    Parameters
    ----------
    kind : {"aircraft", "engine", "propeller"}
        Kind of file [-]

    Returns
    -------
    dict
        Schema of draft 2020-12; what spans several keys or files only `load_profile` checks [-]
    """
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        **_as_written(FILES[kind].model_json_schema()),
        "title": f"cardgen {kind} file",
    }


def _as_written(node: Any) -> Any:
    """Return a schema of what is written in the file, not of what the models make of it.

    A key without a value is an error there, so null goes; so do defaults that are SI numbers where
    a quantity is written, and titles that only repeat the key.
    """
    if isinstance(node, list):
        return [_as_written(entry) for entry in node]
    if not isinstance(node, dict):
        return node
    if "properties" in node:  # its own keys are names of properties, not of the schema
        node = node | {"properties": {k: _as_written(v) for k, v in node["properties"].items()}}
    written = {
        key: value if key == "properties" else _as_written(value)
        for key, value in node.items()
        if key != "title"
    }
    choices = [choice for choice in written.get("anyOf", ()) if choice != {"type": "null"}]
    if len(choices) == 1:
        del written["anyOf"]
        written = choices[0] | written
    elif choices:
        written["anyOf"] = choices
    kind = str(written.get("type", "string"))
    if not isinstance(written.get("default"), _JSON_TYPES.get(kind, ())):
        written.pop("default", None)
    return written
