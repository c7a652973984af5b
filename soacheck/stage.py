"""The stage file: one use of a device, read and put together from the rooms that own its tables."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from soacheck.derate import own
from soacheck.device.path import find_device
from soacheck.device.ratings import Device
from soacheck.device.reader import read_device
from soacheck.duty import Fitted
from soacheck.errors import InputError
from soacheck.heat import path as heat_path
from soacheck.heat.ladder import Ladder, ladder_of
from soacheck.heat.path import HeatPath
from soacheck.limit.rules import Rules
from soacheck.load import load_kind
from soacheck.load.kind import LoadKind, Surround
from soacheck.table import (
    CasePlan,
    Cells,
    Document,
    Key,
    Missing,
    Source,
    Spread,
    check_source,
    parse_source,
    read_source,
)
from soacheck.trace import Traced, given

HOGGING = 1.2  # worst device of a parallel set without a stated share: 20 % above the even one, shown, never decisive


PAPERS = ("author", "checker", "approver", "drawing", "equipment", "date")


def _text(name: str, meaning: str) -> Key:
    return Key(table="stage", name=name, form="text", meaning=meaning, where="the drawing's title block")


_MISMATCH = (
    "sharing worked out from mismatch and ballast is not built yet; state the worst device's share instead: "
    'worst_share = "55 %"'
)


STAGE_KEYS: tuple[Key, ...] = (
    _text("title", "What the stage is; printed first."),
    Key(
        table="stage",
        name="device",
        form="text",
        required=True,
        meaning="The device: file stem, name, or path from this file.",
        where="the parts list",
    ),
    Key(
        table="stage",
        name="complement",
        form="text",
        meaning="The device of the other half of a push-pull stage.",
        where="the parts list",
    ),
    *(_text(name, f"Printed on the report: {name}.") for name in ("revision", *PAPERS)),
    Key(
        table="stage",
        name="parallel",
        form="count",
        meaning="Devices that share the current.",
        where="the circuit diagram",
    ),
    Key(
        table="stage",
        name="worst_share",
        dimension="ratio",
        band=(0.005, 1.0),
        grade="",
        meaning="Share of the total current in the worst of the parallel devices.",
        where="matching and ballast of the set",
    ),
    Key(
        table="stage",
        name="V_BE_mismatch",
        dimension="voltage",
        not_built=_MISMATCH,
        meaning="Spread of V_BE in a parallel set.",
    ),
    Key(
        table="stage",
        name="V_GS_th_mismatch",
        dimension="voltage",
        not_built=_MISMATCH,
        meaning="Spread of V_GS_th in a parallel set.",
    ),
    Key(
        table="load",
        name="kind",
        form="text",
        required=True,
        meaning="What the circuit does to the device.",
        where="the circuit diagram",
    ),
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Half:
    """One device of the stage as it sits in the circuit, with its thermal ladder."""

    fitted: Fitted
    ladder: Ladder | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stage:
    """A stage, read and checked. Values have the case axis of `plan`; `over` gives it with other numbers."""

    title: str
    revision: str
    papers: tuple[tuple[str, str], ...]  # those of PAPERS that are stated, as they stand
    file: str
    sha256: str
    kind: LoadKind
    kind_name: str
    load: Any  # the kind's own frozen dataclass
    halves: tuple[Half, ...]
    heat_path: HeatPath
    rules: Rules
    devices: int  # of the whole stage
    document: Document
    plan: CasePlan
    assumptions: tuple[str, ...]  # taken because the stage file is silent
    half_open: bool  # the circuit has another half whose device is not stated
    folder: Path

    @property
    def spreads(self) -> tuple[Spread, ...]:
        """Uncertainties stated in the stage file."""
        return self.document.spreads

    def over(self, plan: CasePlan) -> Stage:
        """The same stage with the numbers of another plan."""
        return _build(
            self.document.over(plan),
            plan,
            self.kind,
            self.kind_name,
            tuple(half.fitted.device for half in self.halves),
            tuple(half.ladder for half in self.halves),
            self.file,
            self.folder,
        )


def keys_of(kind: LoadKind) -> tuple[Key, ...]:
    """Every key a stage file of this kind may have."""
    return (*STAGE_KEYS, *kind.KEYS, *heat_path.KEYS, *own.KEYS)


def read_stage(path: Path, *, devices: Sequence[Path] = ()) -> Stage:
    """Read a stage file, its device and its complement.

    devices: further folders to look for devices in. Raises InputError with every problem of the file.
    """
    return _from_source(read_source(path, shown_as=str(path)), path.parent, devices)


def stage_from_text(text: str, *, shown_as: str, folder: Path, devices: Sequence[Path] = ()) -> Stage:
    """A stage from the text of a stage file; files that it names are relative to `folder`."""
    return _from_source(parse_source(text, shown_as=shown_as), folder, devices)


def _from_source(source: Source, folder: Path, devices: Sequence[Path]) -> Stage:
    shown_as = source.file
    kind_name, wanted = (
        source.peek("load", "kind"),
        [source.peek("stage", name) for name in ("device", "complement")],
    )
    found: list[Device] = []
    refused: list[tuple[str, str, InputError]] = []
    for name, text in zip(("device", "complement"), wanted, strict=True):
        if isinstance(text, str):
            try:
                file = find_device(text, folder, devices)
                found.append(read_device(file, shown_as=str(file)))
            except InputError as error:
                refused.append(("stage", name, error))
    kind = None
    if isinstance(kind_name, str):
        try:
            kind = load_kind(kind_name)
        except InputError as error:
            refused.append(("load", "kind", error))
    # what is known of the file is checked even when its device or its kind is not, so that all errors come together
    keys = keys_of(kind) if kind is not None else (*STAGE_KEYS, *heat_path.KEYS, *own.KEYS)
    if kind is None:
        source = replace(source, data={**source.data, "load": _kind_alone(source)})
    document = check_source(source, keys, device_kind=found[0].kind if found else None)
    for table, name, refusal in refused:
        _relay(document.table(table), name, refusal)
    if kind is None or not found or refused:
        heat_path.read(document.table("heat_path"), document.table("surroundings"))
        own.read(document.table("derating"))
    elsewhere = tuple(problem for _, _, refusal in refused for problem in refusal.problems if problem.file)
    if elsewhere:
        raise InputError(*document.sheet.ledger.problems(), *elsewhere)
    if kind is None or not found or refused:
        document.finish()  # raises: each of the three was reported above or is a required key that is missing
    if kind is None:
        raise RuntimeError("a stage without a load kind was not refused")
    ladders = tuple(ladder_of(device.thermal, file=device.file) for device in found)
    return _build(document, CasePlan(), kind, str(kind_name), tuple(found), ladders, shown_as, folder)


def _kind_alone(source: Source) -> dict[str, object]:
    kind = source.peek("load", "kind")
    return {} if kind is None else {"kind": kind}


def _relay(cells: Cells, name: str, error: InputError) -> None:
    """Problems of the device's own file stay as they are; those about the key itself get this file's line."""
    for problem in error.problems:
        if not problem.file:
            cells.refuse(name, problem.problem, problem.remedy)


def _build(
    document: Document,
    plan: CasePlan,
    kind: LoadKind,
    kind_name: str,
    devices: tuple[Device, ...],
    ladders: tuple[Ladder | None, ...],
    file: str,
    folder: Path,
) -> Stage:
    stage, load = document.table("stage"), document.table("load")
    values = kind.read(load, Surround(folder=folder, device_kind=devices[0].kind))
    path = heat_path.read(document.table("heat_path"), document.table("surroundings"))
    rules = own.read(document.table("derating"))
    parallel = stage.count("parallel") or 1
    document.finish()
    counts_itself = kind.sharing(values, 1) == kind.sharing(values, 2)
    if counts_itself and stage.has("parallel"):
        stage.refuse("parallel", f"a {kind_name} stage states its devices in [load]", "[load] pairs = 2")
    count, total = kind.sharing(values, parallel), kind.devices(values, parallel)
    if kind.halves(values) < len(devices):
        stage.refuse("complement", f"a {kind_name} stage has no other half", "leave the complement out")
    _check_sink(document.table("heat_path"), path, total)
    fitted = _fitted(stage, devices, count)
    document.finish()
    alone = (
        () if counts_itself or stage.has("parallel") else ("one device, none in parallel (stage.parallel not stated)",)
    )
    return Stage(
        assumptions=(*document.assumptions, *alone, *path.unused),
        title=stage.text("title") or "",
        revision=stage.text("revision") or "",
        papers=tuple((name, text) for name in PAPERS if (text := stage.text(name)) is not None),
        file=file,
        sha256=document.sha256,
        kind=kind,
        kind_name=kind_name,
        load=values,
        halves=tuple(Half(fitted=one, ladder=ladder) for one, ladder in zip(fitted, ladders, strict=True)),
        heat_path=path,
        rules=rules,
        devices=total,
        document=document,
        plan=plan,
        half_open=kind.halves(values) > len(devices),
        folder=folder,
    )


def _check_sink(cells: Cells, path: HeatPath, devices: int) -> None:
    if path.separate_sinks and (path.shared_by is None or path.shared_by >= devices):
        cells.refuse(
            "separate_sinks",
            f"the stage has {devices} devices, and nothing says how many of them this sink carries",
            "shared_by = 1 beside it, or leave it out",
        )
    if path.shared_by is not None and path.shared_by < devices and not path.separate_sinks:
        cells.refuse(
            "shared_by",
            f"the stage has {devices} devices, this sink carries {path.shared_by} of them",
            f"shared_by = {devices}, or separate_sinks = true when the others have sinks of their own",
        )


def _fitted(stage: Cells, devices: tuple[Device, ...], count: int) -> tuple[Fitted, ...]:
    """Each device as it sits in the circuit, with the worst device's share of the current."""
    stated = stage.quantity("worst_share")
    missing: Missing | None = None
    share: Traced
    if count == 1:
        if stated is not None and bool((stated.value < 1).any()):
            stage.refuse(
                "worst_share",
                "one device carries the whole current",
                "parallel = 2 or more, or leave worst_share out",
            )
        share = given("worst_share", 1.0, "1", "one device carries the whole current")
    elif stated is None:
        share = given(
            "worst_share",
            HOGGING / count,
            "1",
            f"20 % above an even split of {count}: shown, never decisive",
            "assumed",
        )
        missing = Missing(key="stage.worst_share", where="matching and ballast resistors of the parallel devices")
    else:
        if bool((stated.value < (1 - 1e-9) / count).any()):
            stage.refuse(
                "worst_share",
                f"the worst of {count} devices cannot carry less than an even share",
                f'worst_share = "{100 / count:.4g} %" or more',
            )
        share = stated
    halves = ("upper", "lower") if len(devices) == 2 else (None,)
    return tuple(
        Fitted(device=device, half=half, count=count, share=share, share_missing=missing)
        for device, half in zip(devices, halves, strict=True)
    )
