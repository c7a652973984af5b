"""The device as frozen data. Symbols follow the file: `V_max` of a MOSFET is V_DSS, of an IGBT V_CES."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from soacheck.trace import FloatArray, Traced

Kind = Literal["npn", "pnp", "npn-darlington", "pnp-darlington", "n-mosfet", "p-mosfet", "n-igbt"]
KINDS: tuple[Kind, ...] = ("npn", "pnp", "npn-darlington", "pnp-darlington", "n-mosfet", "p-mosfet", "n-igbt")
BIPOLAR = frozenset({"npn", "pnp", "npn-darlington", "pnp-darlington"})
MOSFET = frozenset({"n-mosfet", "p-mosfet"})
IGBT = frozenset({"n-igbt"})
INSULATED_GATE = MOSFET | IGBT
BIPOLAR_OR_IGBT = BIPOLAR | IGBT
DARLINGTON = frozenset({"npn-darlington", "pnp-darlington"})


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Triple:
    """A characteristic with its spread; a single stated value is typ, and min and max are then None."""

    min: Traced | None = None
    typ: Traced | None = None
    max: Traced | None = None

    @property
    def low(self) -> Traced | None:
        """The smallest value the sheet vouches for, or the typical one."""
        return self.min if self.min is not None else self.typ if self.typ is not None else self.max

    @property
    def high(self) -> Traced | None:
        """The largest value the sheet vouches for, or the typical one."""
        return self.max if self.max is not None else self.typ if self.typ is not None else self.min

    @property
    def middle(self) -> Traced | None:
        """The typical value, or whatever is stated."""
        return self.typ if self.typ is not None else self.high


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MaxRatings:
    """Absolute maximum ratings, magnitudes, SI."""

    V_max: Traced  # V_CEO, V_DSS or V_CES
    I_max: Traced  # I_C or I_D, continuous
    T_j: Traced  # greatest junction temperature [K]
    P_tot: Traced | None = None
    T_case: Traced  # case temperature P_tot and a MOSFET's I_D are stated at [K]; 25 degC when absent
    V_CBO: Traced | None = None
    V_CEV: Traced | None = None
    V_CER: Traced | None = None
    R_BE: Traced | None = None
    V_EBO: Traced | None = None
    V_GSS: Traced | None = None
    I_peak: Traced | None = None  # I_CM or I_DM
    I_peak_pulse: Traced | None = None  # I_CM_pulse or I_DM_pulse [s]
    I_B: Traced | None = None
    I_S: Traced | None = None
    E_AS: Traced | None = None
    I_AS: Traced | None = None
    E_AR: Traced | None = None
    t_SC: Traced | None = None
    V_SC: Traced | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ThermalData:
    """Junction-to-case thermal data. `form` says which of the three forms of Z_th_jc was written, if any.

    pulse, value: (n,) s and K/W of a single-pulse curve.  foster, cauer: (n, 2) R [K/W] and tau [s], or R
    and C [J/K]. R_th_jc is always there after reading when the sheet gives it or P_tot: see
    `R_th_jc_derived`.
    """

    R_th_jc: Traced | None
    R_th_jc_derived: bool = False  # computed as (T_j - T_case)/P_tot because the file does not state it
    R_th_ja: Traced | None = None
    mounting: str = ""
    form: Literal["none", "pulse", "foster", "cauer"] = "none"
    pulse: FloatArray | None = None
    value: FloatArray | None = None
    foster: FloatArray | None = None
    cauer: FloatArray | None = None
    grade: str = "guaranteed"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SafeAreaCurve:
    """One printed safe-area curve: straight between its points on log-log paper.

    points: (n, 2) V and A as printed, all of them, v rising. pulse: width [s], inf for dc.
    """

    label: str  # "dc", "10 ms": as written
    pulse: float
    points: FloatArray
    T_ref: float  # [K]
    node: Literal["case", "ambient"] = "case"
    bias: Literal["forward", "reverse"] = "forward"
    single: bool = True
    duty_factor: float | None = None  # with single = False
    grade: str = "guaranteed"
    reading: float = 0.0  # how far below the read points to stay, 0 to 1
    source: str = ""
    V_BE_off: Traced | None = None  # reverse-bias curves: their drive conditions
    I_B2: Traced | None = None
    R_G: Traced | None = None
    T_j_valid: Traced | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SafeAreaDerating:
    """How the second-breakdown part of the curves falls with temperature."""

    convention: Literal["like-dissipation", "own-curve", "held"] = "like-dissipation"
    points: FloatArray | None = None  # (n, 2) temperature [K] and factor [1], own-curve only
    stated: bool = False
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Typical:
    """Characteristics; tempcos in V/K. A field is None where the file is silent: nothing is assumed here."""

    h_FE: Triple | None = None
    h_FE_I_C: Traced | None = None
    h_FE_points: FloatArray | None = None  # (n, 3) I_C [A], T [K], h_FE
    V_BE: Triple | None = None
    V_BE_I_C: Traced | None = None
    V_BE_tempco: Traced | None = None
    leakage: Triple | None = None  # I_CBO, I_DSS or I_CES
    leakage_T: Traced | None = None
    doubling: Traced | None = None
    V_CE_sat: Triple | None = None
    V_CE_sat_I_C: Traced | None = None
    V_A: Traced | None = None
    R_DS_on: Triple | None = None
    R_DS_on_V_GS: Traced | None = None
    R_DS_on_hot: Triple | None = None
    T_hot: Traced | None = None
    V_GS_th: Triple | None = None
    V_GS_th_tempco: Traced | None = None
    g_fs: Triple | None = None
    V_BR: Traced | None = None
    V_CE_TO: Triple | None = None
    r_CE: Triple | None = None
    V_CE_TO_hot: Traced | None = None
    r_CE_hot: Traced | None = None
    f_T: Traced | None = None
    E_on: Traced | None = None
    E_off: Traced | None = None
    E_V_ref: Traced | None = None
    E_I_ref: Traced | None = None
    E_T_ref: Traced | None = None
    t_r: Traced | None = None
    t_f: Traced | None = None
    Q_g: Traced | None = None
    C_oss: Traced | None = None
    Q_rr: Traced | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Mechanical:
    """For substitution and mounting."""

    pinout: str = ""
    tab: str = ""  # "collector", "drain", "isolated"
    hole: Traced | None = None
    insulation_voltage: Traced | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Device:
    """One power transistor."""

    name: str
    kind: Kind
    package: str = ""
    ratings_from: str = ""
    file: str = ""  # path as found
    sha256: str = ""
    max: MaxRatings
    thermal: ThermalData
    soa: tuple[SafeAreaCurve, ...] = ()
    soa_derating: SafeAreaDerating
    typical: Typical
    mechanical: Mechanical
    assumptions: tuple[str, ...] = ()
    cautions: tuple[tuple[str, str], ...] = ()  # (id, text): readings through pint, other kinds' keys, no ratings_from

    @property
    def bipolar(self) -> bool:
        """A bipolar transistor or Darlington (not an IGBT)."""
        return self.kind in BIPOLAR

    @property
    def mosfet(self) -> bool:
        return self.kind in MOSFET

    @property
    def igbt(self) -> bool:
        return self.kind in IGBT
