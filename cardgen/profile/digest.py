"""Digests: whether anything that can change a number, or a word, has changed.

Content is digested as it is used, not as it is written: comments, the order of keys and the
spelling of units leave a digest as it is.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import fields, is_dataclass
from typing import Final

import numpy as np

MODEL_VERSION: Final = 1
"""Raised whenever an equation or a constant changes a computed number: every card is then void."""

IDENTITY: Final = "identity"
"""The one group that changes words on a card and no number."""

_DIGITS = 12
"""Significant digits that numbers are digested with: more than any printed number depends on, and
few enough that "76 in" and "1.9304 m", which differ in the last bit, are one diameter."""


def digest_of(content: object) -> str:
    """Return the digest of dataclasses, sequences, mappings, numbers and text.

    Parameters
    ----------
    content : object
        What is digested; mappings by key, whatever their order [-]

    Returns
    -------
    str
        SHA-256, 64 hexadecimal digits [-]

    Raises
    ------
    TypeError
        The content holds something that has no canonical form.
    """
    digest = hashlib.sha256()
    for token in _tokens(content):
        data = token.encode()
        digest.update(b"%d:%b," % (len(data), data))  # lengths keep ("ab", "c") from ("a", "bc")
    return digest.hexdigest()


def digest_parts(parts: Mapping[str, object]) -> dict[str, str]:
    """Return the digest of each part, and of the model that computes with them.

    Parameters
    ----------
    parts : mapping
        Content by name of the part [-]

    Returns
    -------
    dict
        Digest by name, `model` added [-]
    """
    return {name: digest_of(content) for name, content in parts.items()} | {
        "model": digest_of(MODEL_VERSION)
    }


def digest_numbers(part_digests: Mapping[str, str]) -> str:
    """Return the digest of everything that can change a number.

    Parameters
    ----------
    part_digests : mapping
        As `digest_parts` returns them [-]

    Returns
    -------
    str
        SHA-256 over all parts but the identity [-]
    """
    return digest_of({name: part for name, part in part_digests.items() if name != IDENTITY})


def _tokens(content: object) -> Iterator[str]:
    """Yield the canonical form piece by piece."""
    if content is None or isinstance(content, bool | str):
        yield f"{type(content).__name__} {content}"
    elif isinstance(content, int | float | np.floating | np.integer):
        yield f"number {float(content) + 0.0:.{_DIGITS}g}"  # + 0.0 makes -0.0 the zero it is
    elif isinstance(content, np.ndarray):
        yield from _tokens(content.tolist())
    elif isinstance(content, Mapping):
        yield f"mapping {len(content)}"
        for key in sorted(content):
            yield str(key)
            yield from _tokens(content[key])
    elif isinstance(content, Sequence):
        yield f"sequence {len(content)}"
        for entry in content:
            yield from _tokens(entry)
    elif is_dataclass(content) and not isinstance(content, type):
        yield type(content).__name__
        yield from _tokens({field.name: getattr(content, field.name) for field in fields(content)})
    else:
        raise TypeError(f"{type(content).__name__} has no canonical form")
