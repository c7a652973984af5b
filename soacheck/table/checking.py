"""Every key of a file against the declarations: unknown, foreign, missing and wrong ones go to the ledger."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from soacheck.errors import plain
from soacheck.quantity import DIMENSIONS
from soacheck.table.cells import Sheet, is_inline_quantity
from soacheck.table.declare import Key
from soacheck.table.ledger import joined
from soacheck.table.values import Stated, Value, spread_of, value_of


def check_table(sheet: Sheet, path: str, table: str, data: Mapping[str, Any]) -> None:
    """Check one table and all below it. `path` is as in the file, `table` as declared."""
    declared, ledger = sheet.declared, sheet.ledger
    own = declared.own(table)
    offered: set[str] = set()
    for name, raw in data.items():
        if ledger.full:
            return
        dotted = joined(path, name)
        inner = f"{table}.{name}" if table else name
        key = own.get(name)
        if key is not None:
            _check_key(sheet, key, dotted, raw)
        elif inner in declared.tables and not declared.is_foreign(table, name):
            if isinstance(raw, dict):
                check_table(sheet, dotted, inner, raw)
            else:
                ledger.refuse(dotted, f"{name} is a table", f"write its keys under [{inner}]")
        else:
            problem, remedy, near = declared.unknown(table, name, data)
            if near and near not in data and isinstance(raw, str):  # the line that would be right
                remedy += f' {near} = "{plain(raw)}"'
            ledger.refuse(dotted, problem, remedy)
            offered.add(near)
    for name, key in own.items():
        if key.required and name not in data and name not in offered and not key.not_built:
            ledger.refuse(joined(path, name), "this key is wanted and absent", _how_to_state(key, "[" in path))
    if not path:
        for name in declared.top_tables() - data.keys() - offered:
            check_table(sheet, name, name, {})


def _how_to_state(key: Key, of_array: bool) -> str:
    if key.form == "choice":
        line = f'{key.name} = "{key.choices[0]}"'
    elif key.form in ("text", "tree", "table", "tables"):
        line = f'{key.name} = "..."' if key.form == "text" else key.name
    elif key.form == "quantity":
        line = f'{key.name} = "... {DIMENSIONS[key.dimension]}"'
    else:
        line = f"{key.name} = ..."
    header = f"[[{key.table}]]" if of_array and "." not in key.table else f"[{key.table}]"
    text = f"add {line}" + (f" under {header}" if key.table else "")
    return text + (f" ({key.where})" if key.where else "")


def _check_key(sheet: Sheet, key: Key, dotted: str, raw: object) -> None:
    if key.not_built:
        sheet.ledger.refuse(dotted, key.not_built, f"leave {key.name} out")
    elif key.form == "table":
        _check_inner(sheet, key, dotted, raw)
    elif key.form == "tables":
        _check_array(sheet, key, dotted, raw)
    elif key.inside and isinstance(raw, dict) and not is_inline_quantity(key, raw, sheet.declared):
        check_table(sheet, dotted, key.path, raw)
    elif key.form != "tree":  # a tree is read by its owner
        _keep(sheet, dotted, value_of(key, dotted, raw, sheet.ledger))


def _check_inner(sheet: Sheet, key: Key, dotted: str, raw: object) -> None:
    if isinstance(raw, dict):
        check_table(sheet, dotted, key.path, raw)
    else:
        sheet.ledger.refuse(dotted, "a table is wanted here", f"{key.name} = {{ ... }}")


def _check_array(sheet: Sheet, key: Key, dotted: str, raw: object) -> None:
    if not isinstance(raw, list) or not all(isinstance(element, dict) for element in raw):
        sheet.ledger.refuse(dotted, f"{key.name} is a list of tables", f"head each with [[{key.path}]]")
        return
    for number, element in enumerate(raw, 1):
        check_table(sheet, f"{dotted}[{number}]", key.path, element)


def _keep(sheet: Sheet, dotted: str, value: Value | None) -> None:
    if value is None:
        return
    sheet.values[dotted] = value
    spread = spread_of(dotted, value) if isinstance(value, Stated) else None
    if spread is not None:
        sheet.ledger.spreads[dotted] = spread
