"""Every key of a file against the declarations: unknown, foreign, missing and wrong ones go to the ledger."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from soacheck.errors import plain
from soacheck.quantity import DIMENSIONS
from soacheck.table.cells import Sheet, is_inline_quantity
from soacheck.table.declare import Key
from soacheck.table.ledger import Ledger, joined
from soacheck.table.values import Stated, Value, spread_of, value_of


def check_table(sheet: Sheet, path: str, table: str, data: Mapping[str, Any]) -> None:
    """Check one table and all below it. `path` is as in the file, `table` as declared."""
    declared, ledger = sheet.declared, sheet.ledger
    own = declared.own(table)
    _refuse_unbuilt(sheet, path, [own[name] for name in data if name in own and own[name].not_built])
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
            offered.add(_refuse_unknown(sheet, table, dotted, name, data))
    for name, key in own.items():
        if key.required and name not in data and name not in offered and not key.not_built:
            ledger.refuse(joined(path, name), "this key is wanted and absent", _how_to_state(key, "[" in path))
    if not path:
        for name in declared.top_tables() - data.keys() - offered:
            check_table(sheet, name, name, {})


def _how_to_state(key: Key, of_array: bool) -> str:
    line = f"{key.name} = {_value_to_fill_in(key)}"
    header = f"[[{key.table}]]" if of_array and "." not in key.table else f"[{key.table}]"
    text = f"add {line}" + (f" under {header}" if key.table else "")
    return text + (f" ({key.where})" if key.where else "")


def _value_to_fill_in(key: Key) -> str:
    """What stands right of the equals sign: dots are for the user, words and flags are all there is to choose from."""
    if key.form == "flag":
        return "true (or false)"
    if key.form == "choice":
        first, *others = (f'"{choice}"' for choice in key.choices)
        return first + (f" (or {', '.join(others)})" if others else "")
    if key.form == "points":
        row = ", ".join(f'"... {DIMENSIONS[column]}"' if column else "..." for column in key.columns)
        return f"[[{row}], ...]" if len(key.columns) > 1 else f"[{row}, ...]"
    if key.form == "quantity":
        return f'"... {DIMENSIONS[key.dimension]}"'
    return '"..."' if key.form == "text" else "..."


def _refuse_unknown(sheet: Sheet, table: str, dotted: str, name: str, data: Mapping[str, Any]) -> str:
    """Refuse a name that is not declared; the name that was offered instead, "" for none.

    What is wrong with its value comes in the same report, so that the line offered is right as a whole.
    """
    declared, ledger, raw = sheet.declared, sheet.ledger, data[name]
    problem, remedy, near = declared.unknown(table, name, data)
    meant = declared.own(table).get(near)
    if meant is None or near in data:
        ledger.refuse(dotted, problem, remedy)
        return near
    trial = Ledger(ledger.source)
    if meant.form not in ("table", "tables", "tree") and not (meant.inside and isinstance(raw, dict)):
        value_of(meant, dotted, raw, trial)
    first, *others = trial.problems() or (None,)
    if first is None:
        line = f'"{plain(raw)}"' if isinstance(raw, str) else f"{raw}" if type(raw) in (int, float) else ""
        ledger.refuse(dotted, problem, f"{remedy} {near} = {line}" if line else remedy)
    else:
        ledger.refuse(dotted, f"{problem}; besides, {first.problem}", f"{remedy} {first.remedy}")
    for other in others:
        if other is not None:
            ledger.refuse(other.key, other.problem, other.remedy)
    return near


def _refuse_unbuilt(sheet: Sheet, path: str, stated: list[Key]) -> None:
    """Keys that wait for a later version: those with the same reason are refused together, at the first of them."""
    for reason in dict.fromkeys(key.not_built for key in stated):
        names = [key.name for key in stated if key.not_built == reason]
        *most, last = names
        listed = f"{', '.join(most)} and {last}" if most else last
        sheet.ledger.refuse(joined(path, names[0]), reason, f"leave {listed} out")


def _check_key(sheet: Sheet, key: Key, dotted: str, raw: object) -> None:
    if key.not_built:  # refused already, with all of its kind
        return
    if key.form == "table":
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
