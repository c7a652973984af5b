"""The nearest known name for a misspelt one: offered, never applied."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import SequenceMatcher

_LONGEST = 60  # a longer name is no slip of the pen


def folded(name: str) -> str:
    """Letters and digits alone, lower case: "RDS(on)" and "R_DS_on" are one."""
    return "".join(ch for ch in name.casefold() if ch.isalnum())


def likeness(written: str, name: str) -> float:
    """0 to 1; 1 when only case and punctuation differ."""
    if len(written) > _LONGEST:
        return 0.0
    one, other = folded(written), folded(name)
    if max(len(one), len(other)) > 2 * min(len(one), len(other)):
        return 0.0  # a word that merely contains the other's letters
    return 1.0 if one and one == other else min(SequenceMatcher(None, one, other).ratio(), 0.999)


def nearest(written: str, names: Iterable[str], cutoff: float = 0.6) -> str | None:
    """The known name that is most like the written one, None when nothing is."""
    best = max(((likeness(written, name), name) for name in names), default=(0.0, ""), key=lambda pair: pair[0])
    return best[1] if best[0] >= cutoff else None
