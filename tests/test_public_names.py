"""The library's public surface."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import soacheck


def test_the_list_of_names_is_sorted_and_every_name_is_there() -> None:
    assert soacheck.__all__ == sorted(soacheck.__all__)
    assert set(soacheck.__all__) == {*soacheck._HOMES, "__version__"}
    for name in soacheck.__all__:
        assert getattr(soacheck, name) is not None
        assert name in dir(soacheck)


def test_a_name_that_is_not_there_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        soacheck.nothing  # noqa: B018  (the access is the test)


def test_the_import_loads_nothing_heavy() -> None:
    program = "import sys, soacheck; print(' '.join(sys.modules))"
    loaded = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True).stdout.split()
    assert not {"numpy", "scipy", "matplotlib", "pint", "typer"} & set(loaded)


def test_the_version_is_the_one_that_is_packaged() -> None:
    project = tomllib.loads((Path(soacheck.__file__).parent.parent / "pyproject.toml").read_text())
    assert soacheck.__version__ == project["project"]["version"]
