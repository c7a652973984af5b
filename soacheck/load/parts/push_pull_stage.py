"""A push-pull stage as frozen data, and as the numbers that its loci are made from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from soacheck.device.ratings import DARLINGTON, IGBT, MOSFET, Device, Kind
from soacheck.duty import Fitted
from soacheck.load.parts.class_ab import Pair, exponential_pair, square_law_pair, thermal_voltage
from soacheck.load.parts.impedance import ComplexArray, Impedance, impedance, is_resistance, tables
from soacheck.load.parts.levels import Driven
from soacheck.load.parts.swing import Output
from soacheck.trace import FloatArray, Traced, frozen


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PushPull:
    """The `[load]` table of a push-pull stage. Traced values are (case,), SI.

    level: every level, clipped, a peak voltage at the load, or a ratio of the largest unclipped swing;
    `level_value` is there for the last two. f: both ends of the operating range, equal for one frequency;
    None: a held output. R_E, I_Q: of one device; I_Q is 0 where it is not stated. R_name: how the file calls the
    emitter or source resistor.
    """

    V_rail: Traced
    load: Impedance
    level: Literal["any", "clipped", "voltage", "ratio"]
    level_value: Traced | None = None
    f: tuple[Traced, Traced] | None = None
    I_Q: Traced
    I_Q_stated: bool = True
    R_E: Traced
    R_name: str = "R_E"
    pairs: int = 1
    bridged: bool = False
    V_sat: Traced
    I_limit: Traced | None = None
    fault_time: Traced | None = None
    dc_protected: bool = False

    @property
    def amplifiers(self) -> int:
        """Amplifiers on one load."""
        return 2 if self.bridged else 1

    @property
    def resistive(self) -> bool:
        return is_resistance(self.load)

    @property
    def class_b(self) -> bool:
        """Whether no case has an idle current."""
        return not bool(np.any(self.I_Q.value > 0))

    @property
    def one_frequency(self) -> bool:
        """Whether the frequency is a single one in every case."""
        return self.f is not None and bool(np.all(self.f[0].value == self.f[1].value))

    def Z_at(self, f: FloatArray) -> ComplexArray:
        """Impedance that one amplifier sees, (case, n): half the load when bridged. [ohm]

        Rounding may leave a lossless network a real part below 0: that is taken off.
        """
        Z = impedance(self.load, f) / self.amplifiers
        return np.asarray(np.maximum(Z.real, 0.0) + 1j * Z.imag, dtype=np.complex128)

    def resistance(self) -> FloatArray:
        """Resistance that one amplifier sees, (case, 1); only for a resistive load. [ohm]"""
        return self.Z_at(np.ones((1, 1))).real

    def table_rows(self) -> FloatArray:
        """Frequencies at which a measured table of the load has rows. [Hz]"""
        return frozen(np.concatenate([np.empty(0), *(table.f for table in tables(self.load))]))


def column(traced: Traced) -> FloatArray:
    """The value as (case, 1)."""
    return traced.value[:, None]


def law_of(kind: Kind) -> str:
    """How the crossover of such devices is worked out, in words."""
    if kind in MOSFET or kind in IGBT:
        return "crossover of two square-law devices (source resistors left out of it: cautious)"
    junctions = "two junctions each" if kind in DARLINGTON else "one junction each"
    return f"crossover of two exponential devices, {junctions}, at 25 degC"


def output_of(load: PushPull, device: Device, share: Traced) -> Output:
    """One amplifier's output stage as numbers."""
    I_Q, R_E = load.I_Q.value[:, None, None], load.R_E.value[:, None, None]
    square = device.mosfet or device.igbt
    V_T = thermal_voltage(2 if device.kind in DARLINGTON else 1)

    def crossover(i_load: FloatArray) -> Pair:
        return square_law_pair(i_load, I_Q) if square else exponential_pair(i_load, I_Q, R_E, V_T)

    return Output(
        V_rail=column(load.V_rail),
        V_sat=column(load.V_sat),
        R_E=column(load.R_E),
        share=column(share),
        pairs=load.pairs,
        crossover=crossover,
    )


def driven_by(load: PushPull, fitted: Fitted) -> Driven:
    """The output stage on its load."""
    output = output_of(load, fitted.device, fitted.share)
    values = (load.V_rail, load.V_sat, load.R_E, load.I_Q, fitted.share, *(load.f or ()))
    values += () if load.level_value is None else (load.level_value,)
    cases = max(load.Z_at(np.ones((1, 1))).shape[0], *(value.value.size for value in values))
    return Driven(output=output, Z_at=load.Z_at, cases=cases)
