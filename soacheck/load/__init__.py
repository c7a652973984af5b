"""Load kinds: each turns its parameters into duties. A kind is found by its file name, imported when asked.

Every module of this folder is a kind, but for `kind` (the protocol) and names that begin with an underscore;
what kinds share lives in the sub-package `parts`.
"""

from __future__ import annotations

import pkgutil
from importlib import import_module
from typing import cast

from soacheck.errors import InputError, Problem
from soacheck.load.kind import LoadKind

# The kinds that the file format knows, in its order: those that have no module yet are refused by name.
NAMED = (
    "resistive", "push-pull", "class-a", "series-pass", "constant-current", "inductive-switch",
    "capacitive-inrush", "hard-switch", "profile", "recorded",
)  # fmt: skip
_NOT_KINDS = frozenset({"kind"})


def kinds() -> tuple[str, ...]:
    """Names of the load kinds that are built, as written in a file; those of the format come first."""
    built = {
        module.name.replace("_", "-")
        for module in pkgutil.iter_modules(__path__)
        if not module.ispkg and not module.name.startswith("_") and module.name not in _NOT_KINDS
    }
    order = {name: place for place, name in enumerate(NAMED)}
    return tuple(sorted(built, key=lambda name: (order.get(name, len(order)), name)))


def load_kind(name: str) -> LoadKind:
    """The module of a load kind, imported now. InputError for a kind that is not built or not known."""
    built = kinds()
    if name not in built:
        raise InputError(_refusal(name, built))
    return cast(LoadKind, import_module(f"{__name__}.{name.replace('-', '_')}"))


def _refusal(name: str, built: tuple[str, ...]) -> Problem:
    what_is = "built are " + ", ".join(built)
    if name in NAMED:
        problem, remedy = f"the load kind {name} is not built yet in this version", what_is
        if "profile" in built:
            remedy += '; kind = "profile" takes the voltage and current of any circuit as points'
        return Problem(key="load.kind", value=f"'{name}'", problem=problem, remedy=remedy)
    return Problem(
        key="load.kind",
        value=f"'{name}'",
        problem=f"there is no load kind {name!r}",
        remedy=_nearest(name, built, what_is),
    )


def _nearest(name: str, built: tuple[str, ...], what_is: str) -> str:
    from difflib import get_close_matches

    written = name.strip().lower().replace("_", "-").replace(" ", "-")
    close = get_close_matches(written, dict.fromkeys((*built, *NAMED)), n=1, cutoff=0.5)
    if not close:
        return what_is
    note = "" if close[0] in built else " (not built yet)"
    return f'kind = "{close[0]}"{note}; {what_is}'
