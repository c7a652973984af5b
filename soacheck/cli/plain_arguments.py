"""Texts and paths of the command line taken as they are given, and options that were not given left alone.

typer hands every argument to pydantic, also `--help` that nobody asked for; loading it takes a fifth of a cold check
(45 ms). What is neither absent, text nor path still goes that way. Where a release of typer works otherwise, nothing
here takes effect and the answer is the same.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any, get_args, get_origin

from typer.core import TyperCommand, TyperGroup

_AS_GIVEN = (str, Path)
_SLOT = "_runtime_param"  # where typer keeps what turns a parameter's text into its value; built at first use


class _AsGiven:
    """Stands in typer's slot until a value comes that is neither absent, text nor path."""

    def coerce(self, value: Any, param: Any, ctx: Any) -> Any:
        several = param.multiple or param.nargs == -1
        if value is None:
            return () if several else None
        annotation = param.type_descriptor.annotation
        if several and get_origin(annotation) is list and get_args(annotation)[0] in _AS_GIVEN:
            return [get_args(annotation)[0](one) for one in value]
        if annotation in _AS_GIVEN:
            return annotation(value)
        setattr(param, _SLOT, None)
        return param.get_runtime_param().coerce(value, param=param, ctx=ctx)


def _lightened(params: list[Any]) -> list[Any]:
    for param in params:
        if hasattr(param, "type_descriptor") and getattr(param, _SLOT, "no such slot") is None:
            setattr(param, _SLOT, _AsGiven())
    return params


class Command(TyperCommand):
    """A command whose texts and paths are taken as given."""

    def get_params(self, ctx: Any) -> list[Any]:
        return _lightened(super().get_params(ctx))


class Group(TyperGroup):
    """A group of commands whose texts and paths are taken as given."""

    def get_params(self, ctx: Any) -> list[Any]:
        return _lightened(super().get_params(ctx))
