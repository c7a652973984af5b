"""Which numbers each case uses."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.errors import InputError
from soacheck.table import CasePlan, Spread


def spreads(count: int) -> list[Spread]:
    return [Spread(key=f"k{n}", nominal=1.0, low=0.5, high=float(2 + n)) for n in range(count)]


def test_without_spreads_there_is_the_nominal_case_alone() -> None:
    plan = CasePlan.corners([])
    assert (plan.count, dict(plan.values)) == (1, {})


@pytest.mark.parametrize("count", [1, 2, 5, 10])
def test_nominal_comes_first_then_every_corner_once(count: int) -> None:
    plan = CasePlan.corners(spreads(count))
    assert plan.count == 1 + 2**count
    table = np.stack([plan.values[f"k{n}"] for n in range(count)])
    assert table[:, 0].tolist() == [1.0] * count
    assert len({tuple(column) for column in table[:, 1:].T}) == 2**count
    assert all(set(row[1:]) == {0.5, 2.0 + n} for n, row in enumerate(table))


def test_more_than_ten_uncertainties_are_refused_by_name() -> None:
    with pytest.raises(InputError, match="k10"):
        CasePlan.corners(spreads(11))


def test_blocks_put_together_are_the_plan() -> None:
    plan = CasePlan.corners(spreads(3))
    blocks = [plan.block(0, 4), plan.block(4, 8), plan.block(8, 12)]
    assert [block.count for block in blocks] == [4, 4, 1]
    for key, values in plan.values.items():
        assert np.concatenate([block.values[key] for block in blocks]).tolist() == values.tolist()


def test_a_plan_of_uneven_length_is_a_bug() -> None:
    with pytest.raises(ValueError, match="values for 2 cases"):
        CasePlan(count=2, values={"a": np.ones(3)})


def test_the_numbers_of_a_plan_are_read_only_copies() -> None:
    values = np.ones(2)
    plan = CasePlan(count=2, values={"a": values})
    values[0] = 7.0
    assert plan.values["a"].tolist() == [1.0, 1.0]
    assert not plan.values["a"].flags.writeable
