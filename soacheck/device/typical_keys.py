"""The keys of [typical]: characteristics of a device, each declared once.

A list of three is [min, typ, max]. Grades mean nothing here: they are of ratings, curves and thermal values.
"""

from __future__ import annotations

from typing import Any

from soacheck.device.ratings import BIPOLAR, IGBT, INSULATED_GATE, MOSFET
from soacheck.table import Key

BIPOLAR_OR_IGBT = BIPOLAR | IGBT

_TABLE = "table of electrical characteristics"
_SWITCHING = "table of switching characteristics"
_VOLTS, _AMPS = (0.01, 2e4), (1e-4, 2e4)
_LEAK = (1e-15, 10.0)


def _typical(
    name: str,
    dimension: str,
    band: tuple[float, float],
    meaning: str,
    kinds: frozenset[str] | None = None,
    **more: Any,
) -> Key:
    where = more.pop("where", _TABLE)
    return Key(
        table="typical",
        name=name,
        dimension=dimension,
        band=band,
        meaning=meaning,
        belongs_to=kinds,
        where=where,
        grade="",
        **more,
    )


def _spread(
    name: str, dimension: str, band: tuple[float, float], meaning: str, kinds: frozenset[str], **more: Any
) -> Key:
    return _typical(name, dimension, band, meaning, kinds, lists=3, **more)


def _temperature(name: str, meaning: str, kinds: frozenset[str] | None, **more: Any) -> Key:
    return _typical(name, "temperature", (223.15, 673.15), meaning, kinds, sign="any", **more)


TYPICAL_KEYS: tuple[Key, ...] = (
    _typical("h_FE", "", (1, 2e5), "Current gain at h_FE_I_C.", BIPOLAR, lists=3, form="number"),
    _typical("h_FE_I_C", "current", _AMPS, "Collector current that h_FE is stated at.", BIPOLAR),
    Key(
        table="typical",
        name="h_FE_points",
        form="points",
        columns=("current", "temperature", ""),
        belongs_to=BIPOLAR,
        grade="",
        meaning="Collector current, junction temperature and typical gain at each read point.",
        where="chart of current gain against collector current",
    ),
    _spread("V_BE", "voltage", (0.1, 10), "Base-emitter voltage at V_BE_I_C and 25 degC.", BIPOLAR),
    _typical("V_BE_I_C", "current", _AMPS, "Collector current that V_BE is stated at.", BIPOLAR),
    _typical(
        "V_BE_tempco",
        "voltage tempco",
        (-0.02, 0.0),
        "Change of V_BE with temperature; absent: -2 mV/K, Darlington -4 mV/K.",
        BIPOLAR,
        sign="any",
        where="chart of V_BE against temperature",
    ),
    _spread("I_CBO", "current", _LEAK, "Collector-base leakage at I_CBO_T.", BIPOLAR, role="leakage"),
    _spread("I_DSS", "current", _LEAK, "Drain-source leakage at I_DSS_T.", MOSFET, role="leakage"),
    _spread("I_CES", "current", _LEAK, "Collector-emitter leakage at I_CES_T.", IGBT, role="leakage"),
    _temperature("I_CBO_T", "Junction temperature that I_CBO is stated at.", BIPOLAR, role="leakage_T"),
    _temperature("I_DSS_T", "Junction temperature that I_DSS is stated at.", MOSFET, role="leakage_T"),
    _temperature("I_CES_T", "Junction temperature that I_CES is stated at.", IGBT, role="leakage_T"),
    _typical(
        "doubling",
        "temperature difference",
        (3, 30),
        "Rise of temperature that doubles the leakage; absent: 10 K.",
        where="chart of leakage against temperature",
    ),
    _spread("V_CE_sat", "voltage", (0.01, 20), "Saturation voltage at V_CE_sat_I_C.", BIPOLAR_OR_IGBT),
    _typical("V_CE_sat_I_C", "current", _AMPS, "Collector current that V_CE_sat is stated at.", BIPOLAR_OR_IGBT),
    _typical("V_A", "voltage", (1, 1e4), "Early voltage.", BIPOLAR, where="output characteristics, slope"),
    _spread("R_DS_on", "resistance", (1e-5, 1e3), "On-resistance at R_DS_on_V_GS and 25 degC.", MOSFET),
    _typical("R_DS_on_V_GS", "voltage", (0.5, 50), "Gate-source voltage that R_DS_on is stated at.", MOSFET),
    _spread("R_DS_on_hot", "resistance", (1e-5, 1e3), "On-resistance at T_hot.", MOSFET),
    _temperature("T_hot", "Junction temperature of the hot values.", INSULATED_GATE),
    _spread("V_GS_th", "voltage", (0.1, 20), "Gate threshold voltage at 25 degC.", INSULATED_GATE),
    _typical(
        "V_GS_th_tempco",
        "voltage tempco",
        (-0.05, 0.0),
        "Change of V_GS_th with temperature; no default.",
        INSULATED_GATE,
        sign="any",
        where="chart of V_GS_th against temperature",
    ),
    _spread("g_fs", "conductance", (1e-4, 1e5), "Forward transconductance.", INSULATED_GATE),
    _typical("V_BR", "voltage", _VOLTS, "Breakdown voltage in avalanche."),
    _spread("V_CE_TO", "voltage", (0.05, 20), "Knee of the on-state line, cold.", IGBT),
    _spread("r_CE", "resistance", (1e-5, 1e2), "Slope of the on-state line, cold.", IGBT),
    _typical("V_CE_TO_hot", "voltage", (0.05, 20), "Knee of the on-state line at T_hot.", IGBT),
    _typical("r_CE_hot", "resistance", (1e-5, 1e2), "Slope of the on-state line at T_hot.", IGBT),
    _typical("f_T", "frequency", (1e3, 1e12), "Transition frequency.", BIPOLAR),
    _typical("E_on", "energy", (1e-9, 10), "Turn-on energy at E_V_ref, E_I_ref, E_T_ref.", where=_SWITCHING),
    _typical("E_off", "energy", (1e-9, 10), "Turn-off energy at E_V_ref, E_I_ref, E_T_ref.", where=_SWITCHING),
    _typical("E_V_ref", "voltage", _VOLTS, "Voltage that E_on and E_off are stated at.", where=_SWITCHING),
    _typical("E_I_ref", "current", _AMPS, "Current that E_on and E_off are stated at.", where=_SWITCHING),
    _temperature("E_T_ref", "Junction temperature of E_on and E_off.", None, where=_SWITCHING),
    _typical("t_r", "time", (1e-10, 1), "Rise time of the current.", where=_SWITCHING),
    _typical("t_f", "time", (1e-10, 1), "Fall time of the current.", where=_SWITCHING),
    _typical("Q_g", "charge", (1e-12, 1e-3), "Total gate charge.", INSULATED_GATE),
    _typical("C_oss", "capacitance", (1e-13, 1e-3), "Output capacitance."),
    _typical("Q_rr", "charge", (1e-12, 1e-1), "Reverse-recovery charge of the diode.", INSULATED_GATE),
)
