"""No key is declared and then passed over: a reader asks for each, whatever the load and the device."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

import pytest

from soacheck.device import reader
from soacheck.device.keys import KEYS as DEVICE_KEYS
from soacheck.device.ratings import IGBT, KINDS, MOSFET, Kind
from soacheck.load import kinds, load_kind
from soacheck.load.parts.family import family_of
from soacheck.stage import keys_of, read_stage
from soacheck.table import Document, Key, check_source
from tests.device.files import DC
from tests.whole import HEAT

# Looked at before the keys are known, since the declarations depend on them.
PEEKED = {"device.kind", "load.kind", "stage.device", "stage.complement"}

# One for each of the ways that Z_th_jc is stated in.
TRANSIENTS = (
    '{ pulse = ["1 ms", "100 ms"], value = ["0.12 K/W", "0.6 K/W"] }',
    '{ foster = [["0.05 K/W", "0.2 ms"], ["0.78 K/W", "40 ms"]] }',
    '{ cauer = [["0.05 K/W", "4 mJ/K"], ["0.78 K/W", "50 mJ/K"]] }',
)
HEAT_PATHS = (
    HEAT.replace('"1.2 K/W"', '{ R_th = "1.2 K/W", C_th = "200 J/K" }'),
    '[heat_path]\nT_case = "60 degC"\n',
)


def device_text(kind: Kind, transient: str = TRANSIENTS[0]) -> str:
    volts, amps = ("V_DSS", "I_D") if kind in MOSFET else ("V_CES" if kind in IGBT else "V_CEO", "I_C")
    return (
        f'[device]\nname = "T"\nkind = "{kind}"\nratings_from = "a sheet"\n'
        f'[max]\n{volts} = "160 V"\n{amps} = "15 A"\nP_tot = "150 W"\nT_j = "150 degC"\n'
        f"[thermal]\nZ_th_jc = {transient}\n{DC}"
        '[soa_derating]\nconvention = "own-curve"\npoints = [["25 degC", "100 %"], ["150 degC", "40 %"]]\n'
    )


def load_text(load: str, kind: Kind) -> str:
    family = family_of(kind)
    return {
        "profile": 'points = [["0 s", "10 V", "1 A"], ["1 s", "10 V", "1 A"]]\nrepeat = true\n',
        "push-pull": 'V_rail = "30 V"\nload = "8 ohm"\nf = "1 kHz"\nlevel = "any"\n',
        "resistive": f'use = "held"\n{family.supply} = "30 V"\n{family.upper} = "8 ohm"\n'
        f'[load.bias]\n{family.bias} = "5 V"\n' + ("" if family.gate else 'R_B = "100 ohm"\n'),
    }[load]


def passed_over(keys: Iterable[Key], kind: str, asked: set[str]) -> set[str]:
    built = {key.path for key in keys if key.belongs(kind) and not key.not_built}
    return built - asked - PEEKED


@pytest.mark.parametrize("kind", KINDS)
def test_every_key_of_a_rating_file_is_read(kind: Kind, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    made: list[Document] = []

    def kept(source: object, keys: object, **more: object) -> Document:
        made.append(check_source(source, keys, **more))  # type: ignore[arg-type]  # handed on as they come
        return made[-1]

    monkeypatch.setattr(reader, "check_source", kept)
    for transient in TRANSIENTS:
        file = tmp_path / "T.toml"
        file.write_text(device_text(kind, transient), encoding="utf-8")
        reader.read_device(file, shown_as="T.toml")
    asked = {path for document in made for path in document.sheet.ledger.asked}
    assert passed_over(DEVICE_KEYS, kind, asked) == set()


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("load", kinds())
def test_every_key_of_a_stage_file_is_read(load: str, kind: Kind, tmp_path: Path) -> None:
    (tmp_path / "T.toml").write_text(device_text(kind), encoding="utf-8")
    asked: set[str] = set()
    for heat in HEAT_PATHS:
        text = f'[stage]\ndevice = "T"\n[load]\nkind = "{load}"\n{load_text(load, kind)}{heat}'
        (tmp_path / "stage.toml").write_text(text, encoding="utf-8")
        asked |= read_stage(tmp_path / "stage.toml").document.sheet.ledger.asked
    assert passed_over(keys_of(load_kind(load)), kind, asked) == set()
