"""Load kinds are found by their file name, and what is not built is refused by name."""

from __future__ import annotations

import subprocess
import sys

import pytest

from soacheck.errors import InputError, Problem
from soacheck.load import NAMED, kinds, load_kind
from soacheck.table import Key


def refusal(name: str) -> Problem:
    with pytest.raises(InputError) as caught:
        load_kind(name)
    return caught.value.problems[0]


def test_the_kinds_are_the_modules_of_the_folder_and_nothing_else() -> None:
    assert {"resistive", "profile"} <= set(kinds())
    assert set(kinds()) <= set(NAMED)  # no helper module and no `kind` among them


@pytest.mark.parametrize("name", kinds())
def test_every_kind_meets_the_protocol(name: str) -> None:
    kind = load_kind(name)
    assert kind.KEYS
    assert all(isinstance(key, Key) and key.table.startswith("load") for key in kind.KEYS)
    assert all(key.meaning.endswith(".") for key in kind.KEYS)
    for function in ("read", "duties", "devices", "sharing", "halves", "not_analysed"):
        assert callable(getattr(kind, function))


@pytest.mark.parametrize("name", sorted(set(NAMED) - set(kinds())))
def test_a_kind_that_is_not_built_is_refused_by_name_with_the_list_of_what_is(name: str) -> None:
    problem = refusal(name)
    assert problem.key == "load.kind"
    assert problem.problem == f"the load kind {name} is not built yet in this version"
    assert ", ".join(kinds()) in problem.remedy


def test_a_misspelt_kind_is_offered_its_nearest_name() -> None:
    problem = refusal("resistve")
    assert problem.problem == "there is no load kind 'resistve'"
    assert problem.remedy.startswith('kind = "resistive"; ')
    assert refusal("Profile").remedy.startswith('kind = "profile"; ')


def test_a_misspelt_kind_that_is_not_built_is_not_promised() -> None:
    unbuilt = [name for name in NAMED if name not in kinds()]
    for name in unbuilt[:1]:
        assert "(not built yet)" in refusal(name.replace("-", "_")).remedy


def test_a_kind_like_no_other_gets_the_list() -> None:
    assert refusal("xyzzy").remedy == "built are " + ", ".join(kinds())


@pytest.mark.parametrize("name", ["kind", "parts", "__init__", "", "parts.family", "../check"])
def test_no_other_module_can_be_had_as_a_kind(name: str) -> None:
    assert refusal(name).key == "load.kind"


def test_a_kind_is_imported_when_asked_for() -> None:
    code = (
        "import sys, soacheck.load as load\n"
        "load.kinds(); assert 'soacheck.load.profile' not in sys.modules\n"
        "load.load_kind('profile'); assert 'soacheck.load.profile' in sys.modules\n"
        "assert 'soacheck.load.resistive' not in sys.modules\n"
        "assert not any(name.split('.')[0] == 'scipy' for name in sys.modules)\n"
    )
    subprocess.run([sys.executable, "-c", code], check=True)
