"""What is wrong with the input, for the terminal. Not wrapped: `file:line` has to stay in one piece."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from soacheck.errors import Problem
from soacheck.show.text import clean


def errors_text(problems: Sequence[Problem]) -> str:
    """Every problem with its place, its key, the value as written and a line that would be right."""
    blocks = [str(_cleaned(problem)) for problem in problems]
    if len(problems) > 1:
        blocks.append(f"{len(problems)} errors")
    return "\n".join(blocks) + "\n"


def _cleaned(problem: Problem) -> Problem:
    return replace(
        problem,
        problem=clean(problem.problem),
        remedy=clean(problem.remedy),
        file=clean(problem.file),
        key=clean(problem.key),
        value=clean(problem.value),
    )
