"""Findings and results: what `check` returns and the only thing that pictures, sheets and JSON are made of."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from enum import IntEnum

import numpy as np

from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, frozen


class Status(IntEnum):
    """The order in which a worst status is taken."""

    WITHIN = 0
    MARGINAL = 1
    UNPROVEN = 2
    EXCEEDS = 3

    @property
    def word(self) -> str:
        return self.name.lower()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Reason:
    """A sentence about a finding and the cases it is true of. `applies` (1 or case,)."""

    text: str
    applies: BoolArray
    missing: tuple[Missing, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Where:
    """The point that touches the limit, each (case,), NaN where it does not exist.

    region: code of device.laws, -1 none. member: value of the duty's member.
    """

    t: FloatArray
    v: FloatArray
    i: FloatArray
    region: IntArray
    member: FloatArray  # value of the duty's member (level, V_CE, ...), NaN when the duty is a single situation


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Finding:
    """One limit checked for one duty.

    applied, allowed: traced, (case,), None when unknown. utilisation (case,): applied/allowed; NaN when it has no
    number (allowance 0, or not known). status (case,): codes of Status.
    member_name: name of what `where.member` is ("level", "V_CE"); empty when there is none.
    """

    limit: str
    duty: str
    half: str | None = None
    applied: Traced | None = None
    allowed: Traced | None = None
    unit: str = "1"
    utilisation: FloatArray
    status: IntArray
    where: Where
    member_name: str = ""
    basis: str  # the rule in one line, with its formula in symbols
    reasons: tuple[Reason, ...] = ()
    trace: tuple[Traced, ...] = ()  # what an engineer needs to redo it, besides applied and allowed

    def missing(self, case: int) -> tuple[str, ...]:
        """Dotted paths of what this case lacks, without repetition."""
        keys: dict[str, None] = {}
        for reason in self.reasons:
            if reason.applies[case if reason.applies.size > 1 else 0]:
                keys.update(dict.fromkeys(item.key for item in reason.missing))
        return tuple(keys)

    def at(self, case: int) -> Finding:
        """The same finding for one case, every array with a case axis of length 1."""
        memo: dict[int, Traced] = {}

        def one(value: Traced | None) -> Traced | None:
            return None if value is None else one_case(value, case, memo)

        def pick(array: FloatArray) -> FloatArray:
            return np.asarray([array[case if array.size > 1 else 0]])

        where = Where(
            t=pick(self.where.t),
            v=pick(self.where.v),
            i=pick(self.where.i),
            member=pick(self.where.member),
            region=np.asarray([self.where.region[case if self.where.region.size > 1 else 0]]),
        )
        holds = tuple(
            replace(reason, applies=np.asarray([True]))
            for reason in self.reasons
            if reason.applies[case if reason.applies.size > 1 else 0]
        )
        return replace(
            self,
            applied=one(self.applied),
            allowed=one(self.allowed),
            utilisation=pick(self.utilisation),
            status=np.asarray([self.status[case if self.status.size > 1 else 0]]),
            where=where,
            reasons=holds,
            trace=tuple(one_case(value, case, memo) for value in self.trace),
        )


def one_case(value: Traced, case: int, memo: dict[int, Traced]) -> Traced:
    """A traced value and all it rests on, for one case; `memo` keeps shared inputs shared."""
    for node in value.walk():
        if id(node) not in memo:
            memo[id(node)] = replace(
                node,
                value=np.asarray([node.at(case)]),
                inputs=tuple(memo[id(child)] for child in node.inputs),
            )
    return memo[id(value)]


def status_of(utilisation: FloatArray, marginal_from: FloatArray) -> IntArray:
    """Status by utilisation alone; what is not a number is unproven. Shapes (case,), broadcasting.

    Within reaches up to the marginal share and includes it, as marginal reaches up to 1: exactly 80 % of an allowance
    that is marginal from 80 % is within.
    """
    u, m = np.broadcast_arrays(np.asarray(utilisation, dtype=np.float64), np.asarray(marginal_from, dtype=np.float64))
    status = np.full(u.shape, int(Status.UNPROVEN), dtype=np.int64)
    status[u > 1] = int(Status.EXCEEDS)
    status[u <= 1] = int(Status.MARGINAL)
    status[u <= np.minimum(m, 1.0)] = int(Status.WITHIN)
    return status


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Series:
    """What pictures draw of one duty, for one case: arrays over (member or time,), SI, kelvin.

    P_allowed: mean dissipation allowed at the case temperature of each held point, as the rules derate it, (member,);
    empty for duties over time, where the finding `dissipation` holds the one figure.
    T_air: air at the sink, (1,) or over the points, empty where unknown.
    """

    t: FloatArray
    v: FloatArray
    i: FloatArray
    region: IntArray
    T_j: FloatArray  # NaN where unknown
    T_case: FloatArray
    T_heatsink: FloatArray
    use: str  # held, once, repeated
    turn_off: BoolArray
    P_allowed: FloatArray = field(default_factory=lambda: frozen([]))
    T_air: FloatArray = field(default_factory=lambda: frozen([]))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sweep:
    """A duty whose members are judged one by one (`any-level`), for one case: figures over the member, SI, kelvin.

    x (member,): what the members are, rising; the others (member,) with NaN where unknown, empty where never known.
    """

    duty: str
    half: str | None
    name: str  # "level", as in Finding.member_name
    unit: str
    x: FloatArray
    P_mean: FloatArray
    P_allowed: FloatArray = field(default_factory=lambda: frozen([]))
    T_j_peak: FloatArray = field(default_factory=lambda: frozen([]))
    T_case: FloatArray = field(default_factory=lambda: frozen([]))
    T_heatsink: FloatArray = field(default_factory=lambda: frozen([]))
    T_air: FloatArray = field(default_factory=lambda: frozen([]))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DutyResult:
    """One duty's figures, each traced (case,), None when unknown. Temperatures in kelvin, unit "degC"."""

    name: str
    half: str | None
    P_mean: Traced | None = None
    P_peak: Traced | None = None
    V_peak: Traced | None = None
    I_peak: Traced | None = None
    I_mean: Traced | None = None
    I_rms: Traced | None = None
    I_B_peak: Traced | None = None
    T_j_peak: Traced | None = None
    T_j_mean: Traced | None = None
    T_case: Traced | None = None
    T_heatsink: Traced | None = None
    R_th_total: Traced | None = None
    facts: tuple[Traced, ...] = ()
    series: Series | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Caution:
    id: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class StageFacts:
    title: str
    file: str
    sha256: str
    revision: str
    papers: tuple[tuple[str, str], ...] = ()  # what is printed as it stands: author, checker, drawing, equipment, date


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceFacts:
    name: str
    file: str
    sha256: str
    ratings_from: str
    kind: str = ""  # "npn", "n-mosfet", ...: decides the words for regions and the symbols of the axes


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SafeAreaPicture:
    """For the safe-area picture of one half: printed and scaled curves of the governing duty, V and A.

    curves: (label, printed (n, 2), scaled (m, 2)); a scaled curve of shape (0, 2) allows nothing at this temperature.
    V_max, I_max, I_peak: the ratings themselves, NaN where the device states none.
    v, i: locus of the governing finding where no listed duty has it (`any-level`), empty otherwise.
    factor: what the rules leave of the safe area; it is in `scaled` already.
    """

    half: str | None
    duty: str
    T_ref: float
    T: float
    curves: tuple[tuple[str, FloatArray, FloatArray], ...]
    V_max: float
    I_max: float
    I_peak: float
    v: FloatArray = field(default_factory=lambda: frozen([]))
    i: FloatArray = field(default_factory=lambda: frozen([]))
    factor: float = 1.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Characteristics:
    """For the `line` picture: output characteristics (label, v (n,), i (n,)) for a few base currents or gate drives."""

    half: str | None
    curves: tuple[tuple[str, FloatArray, FloatArray], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Result:
    """The answer to one stage, decided: every array has a case axis of length 1.

    `spread` says whether the stage states uncertainties; without any the verdict line says "nominal values only".
    nominal: utilisation of each finding at nominal values, in the order of `findings`, NaN when there is none.
    """

    stage: StageFacts
    device: DeviceFacts
    complement: DeviceFacts | None = None
    verdict: Status
    duties: tuple[DutyResult, ...]
    findings: tuple[Finding, ...]  # by status, then utilisation, worst first
    nominal: tuple[float, ...]
    spread: bool
    not_analysed: tuple[str, ...] = ()
    assumptions: tuple[str, ...] = ()
    cautions: tuple[Caution, ...] = ()
    inputs: tuple[Traced, ...] = ()  # every stated input, for the sheet
    safe_area: tuple[SafeAreaPicture, ...] = ()
    characteristics: tuple[Characteristics, ...] = field(default=())
    sweeps: tuple[Sweep, ...] = ()
    lines: tuple[DutyResult, ...] = ()  # held lines of duties without a row: name, half and series
