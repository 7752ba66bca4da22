"""Costs that must not creep: ratios to the bare library, with room for a busy machine."""

from __future__ import annotations

import runpy
from pathlib import Path

import pytest

pytestmark = pytest.mark.benchmark

SCRIPT = runpy.run_path(str(Path(__file__).with_name("against_the_bare_library.py")))


def test_columns_of_the_ideal_gas_stay_near_bare_numpy():
    ((_, ours, bare),) = SCRIPT["ideal_gas_rows"]()
    assert ours < 10.0 * bare  # measured: 3.2


def test_a_balance_with_its_verdict_stays_well_below_a_millisecond():
    ((_, ours, _),) = SCRIPT["balance_row"]()
    assert ours < 1e-3  # measured: 1e-4


def test_starting_up_is_not_slower_than_loading_the_unit_registry_twice():
    ((_, ours, pint),) = SCRIPT["start_up_row"]()
    assert ours < 2.0 * pint  # measured: 0.8
