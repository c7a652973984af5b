"""The form that every JSON document of soacheck has, and the one that says what is wrong with the input."""

from __future__ import annotations

import json
from collections.abc import Sequence

from soacheck.errors import Problem

FORMAT = 1

Json = dict[str, object]


def document(content: object) -> str:
    """One JSON document: sorted keys, no NaN, ASCII.

    ASCII escapes: neither the output's encoding nor an invisible character in a title can spoil it.
    """
    return json.dumps(content, indent=2, sort_keys=True, allow_nan=False) + "\n"


def errors_as_json(problems: Sequence[Problem]) -> str:
    """What is wrong with the input; null for what an error does not have."""
    names = ("file", "line", "key", "value", "problem", "remedy")
    errors = [{name: getattr(problem, name) or None for name in names} for problem in problems]
    return document({"format": FORMAT, "errors": errors})
