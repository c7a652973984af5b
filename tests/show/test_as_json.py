"""The JSON document: the documented keys, null for the unknown, the same bytes each time."""

from __future__ import annotations

import json
import math
import subprocess
import sys
from typing import Any

import numpy as np

from soacheck.errors import Problem
from soacheck.result import DeviceFacts, DutyResult, StageFacts, Status
from soacheck.show.as_json import as_json
from soacheck.show.document import errors_as_json
from soacheck.trace import given

from .build import HOSTILE, amplifier, finding, reason, result, where


def read(text: str) -> Any:
    def refuse(name: str) -> None:
        raise AssertionError(f"{name} is not JSON")

    return json.loads(text, parse_constant=refuse)


def test_the_document_has_the_documented_keys() -> None:
    content = read(as_json([amplifier()]))
    assert {
        "format", "soacheck", "verdict", "stage", "device", "duties", "findings", "runaway", "not_analysed",
        "assumptions", "cautions",
    } <= content.keys()  # fmt: skip
    assert (content["format"], content["verdict"], content["runaway"]) == (1, "exceeds", {})
    assert content["stage"] == {
        "title": "Hall amplifier, 4 ohm", "file": "amp.toml", "sha256": "ab" * 32, "revision": "B",
    }  # fmt: skip
    assert content["device"].items() >= {"name": "EXAMPLE-NPN-160", "file": "npn160.toml"}.items()
    assert content["duties"][0].keys() == {
        "name", "half", "P_mean", "P_peak", "V_peak", "I_peak", "I_mean", "I_rms", "I_B_peak", "T_j_peak",
        "T_j_mean", "T_case", "T_heatsink", "R_th_total",
    }  # fmt: skip
    assert content["findings"][0].keys() >= {
        "limit", "duty", "half", "status", "applied", "allowed", "unit", "utilisation", "nominal_utilisation",
        "where", "basis", "missing",
    }  # fmt: skip
    assert content["cautions"][1] == {"id": "shared-sink", "text": "four devices heat the sink"}


def test_where_carries_the_member_and_the_region_in_words() -> None:
    content = read(as_json([amplifier()]))
    assert content["findings"][0]["where"] == {
        "t": 0.0032,
        "v": 42.1,
        "i": 1.2,
        "region": "active",
        "level": 12.3,
    }


def test_where_is_there_with_nulls_when_there_is_no_point() -> None:
    content = read(as_json([result(finding(where=where()))]))
    assert content["findings"][0]["where"] == {"t": None, "v": None, "i": None, "region": None}


def test_a_mosfet_is_on_where_a_bipolar_saturates() -> None:
    mosfet = DeviceFacts(name="M", file="", sha256="", ratings_from="", kind="n-mosfet")
    item = finding(where=where(0.2, 3.0, region=2))
    assert read(as_json([result(item)]))["findings"][0]["where"]["region"] == "saturation"
    assert read(as_json([result(item, device=mosfet)]))["findings"][0]["where"]["region"] == "on"


def test_what_has_no_number_is_null() -> None:
    item = finding(applied=None, allowed=math.inf, utilisation=math.nan, status=Status.UNPROVEN)
    duty = DutyResult(name="idle", half=None, P_mean=given("P_mean", [math.nan], "W", ""))
    content = read(as_json([result(item, duties=(duty,))]))
    found = content["findings"][0]
    assert (found["applied"], found["allowed"], found["utilisation"], found["nominal_utilisation"]) == (None,) * 4
    assert content["duties"][0]["P_mean"] is None
    assert content["duties"][0]["T_j_peak"] is None


def test_temperatures_are_in_celsius_and_differences_are_not_shifted() -> None:
    duty = DutyResult(
        name="d", half=None, T_case=given("T", [353.15], "degC", ""), R_th_total=given("R", [1.5], "K/W", "")
    )
    item = finding(applied=353.15, allowed=423.15, unit="degC")
    content = read(as_json([result(item, duties=(duty,))]))
    assert (content["duties"][0]["T_case"], content["duties"][0]["R_th_total"]) == (80.0, 1.5)
    assert (content["findings"][0]["applied"], content["findings"][0]["allowed"]) == (80.0, 150.0)


def test_numbers_keep_their_full_precision() -> None:
    item = finding(applied=0.1 + 0.2, utilisation=1 / 3)
    found = read(as_json([result(item)]))["findings"][0]
    assert (found["applied"], found["utilisation"]) == (0.1 + 0.2, 1 / 3)


def test_missing_keys_and_reasons_are_listed() -> None:
    item = finding(
        status=Status.UNPROVEN,
        utilisation=np.nan,
        reasons=(reason("because", ("thermal.R_th_jc", "data sheet")), reason("not this", applies=False)),
    )
    found = read(as_json([result(item)]))["findings"][0]
    assert (found["missing"], found["reasons"]) == (["thermal.R_th_jc"], ["because"])


def test_several_stages_are_a_list() -> None:
    assert [entry["verdict"] for entry in read(as_json([amplifier(), result(finding())]))] == [
        "exceeds",
        "within",
    ]


def test_hostile_text_survives_exactly_and_the_document_is_ascii() -> None:
    text = as_json([result(finding(), stage=StageFacts(title=HOSTILE, file="", sha256="", revision="\udcb0"))])
    assert text.isascii()
    assert read(text)["stage"]["title"] == HOSTILE


def test_errors_have_the_documented_fields() -> None:
    problem = Problem(
        file="amp.toml",
        line=12,
        key="max.P_tot",
        value="'150 V'",
        problem="a power is wanted",
        remedy='P_tot = "150 W"',
    )
    assert read(errors_as_json([problem])) == {
        "format": 1,
        "errors": [
            {
                "file": "amp.toml", "line": 12, "key": "max.P_tot", "value": "'150 V'",
                "problem": "a power is wanted",
                "remedy": 'P_tot = "150 W"',
            }
        ],
    }  # fmt: skip


def test_two_processes_with_other_hash_seeds_write_the_same_bytes() -> None:
    program = (
        "from tests.show.build import amplifier; from soacheck.show.as_json import as_json; "
        "print(as_json([amplifier()]))"
    )
    outputs = {
        subprocess.run(
            [sys.executable, "-c", program], env={"PYTHONHASHSEED": seed, "PYTHONPATH": ":".join(sys.path)},
            capture_output=True, check=True,
        ).stdout
        for seed in ("1", "2")
    }  # fmt: skip
    assert len(outputs) == 1


def test_an_empty_text_is_null() -> None:
    bare = result(
        finding(), stage=StageFacts(title="", file="", sha256="", revision=""),
        device=DeviceFacts(name="X", file="", sha256="", ratings_from=""),
    )  # fmt: skip
    content = read(as_json([bare]))
    assert set(content["stage"].values()) == {None}
    assert [content["device"][key] for key in ("file", "sha256", "ratings_from", "kind")] == [None] * 4


def test_an_error_without_a_place_has_null_there() -> None:
    (error,) = read(errors_as_json([Problem(problem="p", remedy="r")]))["errors"]
    assert error == {"file": None, "line": None, "key": None, "value": None, "problem": "p", "remedy": "r"}
