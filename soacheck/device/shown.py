"""A rating file read back as plain text: every value as it was understood, to be compared with the data sheet."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator
from dataclasses import fields
from pathlib import Path

from soacheck.device.ratings import Device, SafeAreaCurve, SafeAreaDerating, ThermalData, Triple
from soacheck.errors import plain
from soacheck.quantity import DIMENSIONS, write
from soacheck.trace import FloatArray, Traced

_WIDTH = 80
_NAME = 16  # width of the column of names
_DISAGREE = 0.10  # of P_tot, from which R_th_jc and P_tot do not belong together
_DIGITS = 4
_BY_UNIT = {unit: dimension for dimension, unit in DIMENSIONS.items()}


def shown(device: Device) -> str:
    """The device as plain text of at most 80 columns, every value that was read and what was made of it."""
    blocks = (
        _head(device),
        ("Absolute maximum ratings", *_ratings(device)),
        ("Thermal", *_thermal(device)),
        *(_curve(curve) for curve in device.soa),
        ("Second breakdown against temperature", *_derating(device.soa_derating)),
        ("Characteristics", *_fields(device.typical), *_gain(device.typical.h_FE_points)),
        ("Mounting", *_mounting(device)),
        ("Left open by this file", *_bullets(_open(device))),
        ("Assumed", *_bullets(device.assumptions)),
        ("Cautions", *_bullets(f"{text} [{name}]" for name, text in device.cautions)),
    )
    return "\n\n".join("\n".join(block) for block in blocks if len(block) > 1) + "\n"


def _head(device: Device) -> tuple[str, ...]:
    what = ", ".join(filter(None, (device.kind, plain(device.package))))
    return (
        f"{plain(device.name)}: {what}",
        *_line("ratings from", plain(device.ratings_from, 400) or "not stated"),
        *_line("file", plain(Path(device.file).name, 200)),
        f"  sha256  {device.sha256}",
    )


def _line(name: str, text: str) -> Iterator[str]:
    yield from textwrap.wrap(
        text,
        _WIDTH,
        initial_indent=f"  {name:<{_NAME - 1}} ",
        subsequent_indent=" " * (_NAME + 2),
        break_on_hyphens=False,
    )


def _bullets(texts: Iterable[str]) -> Iterator[str]:
    for text in texts:
        yield from textwrap.wrap(plain(text, 1000), _WIDTH, initial_indent="  - ", subsequent_indent="    ")


def _value(value: Traced) -> str:
    si = value.at(0)
    return f"{si:.{_DIGITS}g}" if value.unit == "1" else write(si, _BY_UNIT[value.unit], _DIGITS)


def _graded(value: Traced) -> str:
    return _value(value) + (f" ({value.grade})" if value.grade not in ("", "guaranteed") else "")


def _triple(triple: Triple) -> tuple[str, str]:
    ends = (("min", triple.min), ("typ", triple.typ), ("max", triple.max))
    stated = [(word, value) for word, value in ends if value is not None]
    if len(stated) == 1:
        return stated[0][1].symbol, _graded(stated[0][1])
    return stated[0][1].symbol, ", ".join(f"{word} {_value(value)}" for word, value in stated)


def _fields(data: object) -> Iterator[str]:
    """Every stated value of a dataclass of traced values, under the name that it has in the file."""
    for field in fields(data):  # type: ignore[arg-type]  # MaxRatings, Typical, Mechanical: all dataclasses
        value = getattr(data, field.name)
        if isinstance(value, Traced):
            yield from _line(value.symbol.replace("T_j_max", "T_j"), _graded(value))
        elif isinstance(value, Triple):
            yield from _line(*_triple(value))


def _ratings(device: Device) -> Iterator[str]:
    yield from _fields(device.max)
    R, P, T_j = device.thermal.R_th_jc, device.max.P_tot, device.max.T_j.at(0)
    if R is None or P is None or device.thermal.R_th_jc_derived:
        return
    implied = (T_j - device.max.T_case.at(0)) / R.at(0)
    off = implied / P.at(0) - 1
    says = f"(T_j - T_case)/R_th_jc is {write(implied, 'power', 3)}, "
    if abs(off) <= _DISAGREE:
        says += f"{100 * abs(off):.2g} % {'above' if off >= 0 else 'below'} P_tot: the two agree"
    else:
        says += f"{100 * abs(off):.0f} % {'above' if off > 0 else 'below'} P_tot: the cautious one counts"
    yield from _line("cross-check", says)


def _thermal(device: Device) -> Iterator[str]:
    thermal = device.thermal
    if thermal.R_th_jc is not None:
        how = "  from (T_j - T_case)/P_tot, not stated" if thermal.R_th_jc_derived else ""
        yield from _line("R_th_jc", _graded(thermal.R_th_jc) + how)
    if thermal.R_th_ja is not None:
        yield from _line("R_th_ja", _graded(thermal.R_th_ja))
    if thermal.mounting:
        yield from _line("mounting", plain(thermal.mounting, 400))
    yield from _transient(thermal)


def _transient(thermal: ThermalData) -> Iterator[str]:
    if thermal.pulse is not None and thermal.value is not None:
        curve = zip(thermal.pulse, thermal.value, strict=True)
        rows = [(write(t, "time", 4), write(z, "thermal resistance", 4)) for t, z in curve]
        says, heads = "single-pulse curve", ("pulse", "Z_th_jc")
    elif thermal.foster is not None:
        rows = [(write(R, "thermal resistance", 4), write(tau, "time", 4)) for R, tau in thermal.foster]
        says, heads = f"foster pairs, sum {thermal.foster[:, 0].sum():.4g} K/W", ("R", "tau")
    elif thermal.cauer is not None:
        rows = [(write(R, "thermal resistance", 4), write(C, "heat capacity", 4)) for R, C in thermal.cauer]
        says, heads = f"cauer ladder from the junction, sum {thermal.cauer[:, 0].sum():.4g} K/W", ("R", "C")
    else:
        return
    grade = "" if thermal.grade == "guaranteed" else f" ({thermal.grade})"
    yield from _line("Z_th_jc", says + grade)
    yield from _rows(heads, rows)


def _rows(heads: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> Iterator[str]:
    for row in (heads, *rows):
        yield " " * (_NAME + 2) + "".join(f"{cell:>14}" for cell in row)


def _curve(curve: SafeAreaCurve) -> tuple[str, ...]:
    if curve.bias == "reverse":
        title = "Turn-off area"
        drives = (curve.V_BE_off, curve.I_B2, curve.R_G, curve.T_j_valid)
        stated = [f"{each.symbol} {_value(each)}" for each in drives if each is not None]
        notes = [", ".join(stated) if stated else "no drive conditions stated"]
    else:
        title = f"Safe area, {plain(curve.label)}"
        notes = [f"drawn for {write(curve.T_ref, 'temperature', 4)} at the {curve.node}"]
        if curve.pulse != float("inf"):
            repeated = "repeated pulses" if curve.duty_factor is None else f"duty factor {curve.duty_factor:.3g}"
            notes.append("single pulses" if curve.single else repeated)
    if curve.grade != "guaranteed":
        notes.append(curve.grade)
    if curve.reading:
        notes.append(f"read {100 * curve.reading:.3g} % lower")
    rows = [(write(v, "voltage", 4), write(i, "current", 4), write(v * i, "power", 3)) for v, i in curve.points]
    return (f"{title} ({', '.join(notes)})", *_rows(("V", "I", "V*I"), rows))


def _derating(derating: SafeAreaDerating) -> Iterator[str]:
    yield from _line("convention", derating.convention + ("" if derating.stated else "  (not stated)"))
    if derating.points is not None:
        rows = [(write(T, "temperature", 4), write(factor, "ratio", 4)) for T, factor in derating.points]
        yield from _rows(("T", "factor"), rows)


def _gain(points: FloatArray | None) -> Iterator[str]:
    if points is None:
        return
    yield from _line("h_FE_points", "typical gain")
    rows = [(write(i, "current", 4), write(T, "temperature", 4), f"{gain:.4g}") for i, T, gain in points]
    yield from _rows(("I_C", "T_j", "h_FE"), rows)


def _mounting(device: Device) -> Iterator[str]:
    for name in ("pinout", "tab"):
        text = getattr(device.mechanical, name)
        if text:
            yield from _line(name, plain(text, 200))
    yield from _fields(device.mechanical)


def _open(device: Device) -> Iterator[str]:
    """What decisions will lack, before a stage asks for it."""
    forward = [curve for curve in device.soa if curve.bias == "forward"]
    if not any(curve.pulse == float("inf") for curve in forward):
        yield "no dc safe-area curve: conduction that lasts stays unproven"
    if not any(curve.pulse != float("inf") for curve in forward):
        yield "no pulse safe-area curve: what leaves the dc curve stays unproven"
    if device.thermal.form == "none":
        yield "no Z_th_jc: junction peaks are judged by a bound only"
    if device.max.I_peak is None:
        yield "no peak current rating: the continuous rating stands in for it"
    if device.typical.leakage is None:
        yield "no leakage: thermal stability rests on a bound only"
