"""The stage file: one use of a device, read and put together from the rooms that own its tables."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from soacheck.derate import own
from soacheck.device.path import find_device
from soacheck.device.ratings import Device
from soacheck.device.reader import read_device
from soacheck.duty import Fitted
from soacheck.errors import InputError, Problem
from soacheck.heat import path as heat_path
from soacheck.heat.ladder import Ladder, ladder_of
from soacheck.heat.path import HeatPath
from soacheck.limit.rules import Rules
from soacheck.load import load_kind
from soacheck.load.kind import LoadKind, Surround
from soacheck.table import CasePlan, Cells, Document, Key, Missing, Spread, read_document
from soacheck.trace import Traced, given

HOGGING = 1.2  # worst device of a parallel set without a stated share: 20 % above the even one, shown, never decisive
MAX_SPREADS = 10  # 2**10 corners


def _text(name: str, meaning: str) -> Key:
    return Key(table="stage", name=name, form="text", meaning=meaning, where="the drawing's title block")


_MISMATCH = "sharing worked out from mismatch and ballast is not built yet; state worst_share instead, for example worst_share = \"55 %\""

STAGE_KEYS: tuple[Key, ...] = (
    _text("title", "What the stage is; printed first."),
    Key(table="stage", name="device", form="text", required=True, meaning="The device: file stem, name, or path from this file.",
        where="the parts list"),
    Key(table="stage", name="complement", form="text", meaning="The device of the other half of a push-pull stage.",
        where="the parts list"),
    *(_text(name, f"Printed on the report: {name}.") for name in
      ("revision", "author", "checker", "approver", "drawing", "equipment", "date")),
    Key(table="stage", name="parallel", form="count", default="1", assumption="one device, none in parallel (stage.parallel not stated)",
        meaning="Devices that share the current.", where="the circuit diagram"),
    Key(table="stage", name="worst_share", dimension="ratio", band=(0.005, 1.0), grade="",
        meaning="Share of the total current in the worst of the parallel devices.", where="matching and ballast of the set"),
    Key(table="stage", name="V_BE_mismatch", dimension="voltage", not_built=_MISMATCH, meaning="Spread of V_BE in a parallel set."),
    Key(table="stage", name="V_GS_th_mismatch", dimension="voltage", not_built=_MISMATCH, meaning="Spread of V_GS_th in a parallel set."),
    Key(table="load", name="kind", form="text", required=True, meaning="What the circuit does to the device.", where="the circuit diagram"),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Half:
    """One device of the stage as it sits in the circuit, with its thermal ladder."""

    fitted: Fitted
    ladder: Ladder | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stage:
    """A stage, read and checked. Values have the case axis of `plan`; `over` gives the same stage with other numbers."""

    title: str
    revision: str
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
    half_open: bool  # the circuit has another half whose device is not stated
    folder: Path

    @property
    def spreads(self) -> tuple[Spread, ...]:
        """Uncertainties stated in the stage file."""
        return self.document.spreads

    def over(self, plan: CasePlan) -> Stage:
        """The same stage with the numbers of another plan."""
        return _build(self.document.over(plan), plan, self.kind, self.kind_name, tuple(half.fitted.device for half in self.halves),
                      tuple(half.ladder for half in self.halves), self.file, self.folder)  # fmt: skip


def keys_of(kind: LoadKind) -> tuple[Key, ...]:
    """Every key a stage file of this kind may have."""
    return (*STAGE_KEYS, *kind.KEYS, *heat_path.KEYS, *own.KEYS)


def read_stage(path: Path, *, devices: Sequence[Path] = ()) -> Stage:
    """Read a stage file, its device and its complement.

    devices: further folders to look for devices in. Raises InputError with every problem of the file.
    """
    shown_as = str(path)
    head = read_document(path, STAGE_KEYS, shown_as=shown_as, only=("stage", "load"))
    kind_name = head.table("load").text("kind")
    device_cells = head.table("stage")
    found: list[Device] = []
    for name in ("device", "complement"):
        wanted = device_cells.text(name)
        if wanted is None:
            continue
        try:
            file = find_device(wanted, path.parent, devices)
            found.append(read_device(file, shown_as=str(file)))
        except InputError as error:
            _relay(device_cells, name, error)
    kind = None
    if kind_name is not None:
        try:
            kind = load_kind(kind_name)
        except InputError as error:
            _relay(head.table("load"), "kind", error)
    if kind is None or not found or head.problems:
        head.finish()
        raise InputError(Problem(file=shown_as, problem="no device and no load kind are stated", remedy='[stage] device = "..."'))
    document = read_document(path, keys_of(kind), shown_as=shown_as, device_kind=found[0].kind)
    ladders = tuple(ladder_of(device.thermal, file=device.file) for device in found)
    return _build(document, CasePlan(), kind, kind_name or "", tuple(found), ladders, shown_as, path.parent)


def _relay(cells: Cells, name: str, error: InputError) -> None:
    """Problems that already say their own file are raised as they are; others get this file's line."""
    if any(problem.file for problem in error.problems):
        raise error
    for problem in error.problems:
        cells.refuse(name, problem.problem, problem.remedy)


def _build(
    document: Document, plan: CasePlan, kind: LoadKind, kind_name: str, devices: tuple[Device, ...],
    ladders: tuple[Ladder | None, ...], file: str, folder: Path,
) -> Stage:  # fmt: skip
    stage, load = document.table("stage"), document.table("load")
    values = kind.read(load, Surround(folder=folder, device_kind=devices[0].kind))
    path = heat_path.read(document.table("heat_path"), document.table("surroundings"))
    rules = own.read(document.table("derating"))
    parallel = stage.count("parallel") or 1
    document.finish()
    count, total = kind.sharing(values, parallel), kind.devices(values, parallel)
    if kind.halves(values) < len(devices):
        stage.refuse("complement", f"a {kind_name} stage has no other half", "leave the complement out")
    _check_sink(document.table("heat_path"), path, total)
    fitted = _fitted(stage, devices, count)
    if len(document.spreads) > MAX_SPREADS:
        stage.refuse("device", f"{len(document.spreads)} uncertainties are stated, corners are worked out for up to {MAX_SPREADS}",
                     "keep min / max / tol on the values that matter most")  # fmt: skip
    document.finish()
    return Stage(
        title=stage.text("title") or "", revision=stage.text("revision") or "", file=file, sha256=document.sha256, kind=kind,
        kind_name=kind_name, load=values, halves=tuple(Half(fitted=f, ladder=l) for f, l in zip(fitted, ladders, strict=True)),
        heat_path=path, rules=rules, devices=total, document=document, plan=plan,
        half_open=kind.halves(values) > len(devices), folder=folder,
    )  # fmt: skip


def _check_sink(cells: Cells, path: HeatPath, devices: int) -> None:
    if path.shared_by is not None and path.shared_by < devices and not path.separate_sinks:
        cells.refuse(
            "shared_by", f"the stage has {devices} devices, this sink carries {path.shared_by} of them",
            f"shared_by = {devices}, or separate_sinks = true when the others have sinks of their own",
        )  # fmt: skip


def _fitted(stage: Cells, devices: tuple[Device, ...], count: int) -> tuple[Fitted, ...]:
    """Each device as it sits in the circuit, with the worst device's share of the current."""
    stated = stage.quantity("worst_share")
    missing: Missing | None = None
    share: Traced
    if count == 1:
        if stated is not None and bool((stated.value < 1).any()):
            stage.refuse("worst_share", "one device carries the whole current", "parallel = 2 or more, or leave worst_share out")
        share = given("worst_share", 1.0, "1", "one device carries the whole current")
    elif stated is None:
        share = given("worst_share", HOGGING / count, "1", f"20 % above an even split of {count}: shown, never decisive", "assumed")
        missing = Missing(key="stage.worst_share", where="matching and ballast resistors of the parallel devices")
    else:
        if bool((stated.value < (1 - 1e-9) / count).any()):
            stage.refuse("worst_share", f"the worst of {count} devices cannot carry less than an even share", f'worst_share = "{100 / count:.4g} %" or more')
        share = stated
    halves = ("upper", "lower") if len(devices) == 2 else (None,)
    return tuple(
        Fitted(device=device, half=half, count=count, share=share, share_missing=missing)
        for device, half in zip(devices, halves, strict=True)
    )
