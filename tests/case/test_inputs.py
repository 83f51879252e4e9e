"""The tables on what is not known, on loads, induction and sizing: accepted and refused."""

from __future__ import annotations

import math

import numpy as np
import pytest

from case_text import PAIR, changed, refusals
from unlanded.case.loading import read_case
from unlanded.study.spread import limits

LOAD = changed(PAIR, (
    'b = "open"', 'b = {load = {name = "coil", resistance = "40 kohm"}, to = "N"}'))


def spread_of(line: str):
    return read_case(PAIR + f"[spread]\n{line}\n").content.spread


@pytest.mark.parametrize(("line", "low", "high"), [
    ('length = "10 %"', 9.0, 11.0),
    ('length = {tolerance = "10 %"}', 9.0, 11.0),
    ('length = {low = "8 m", high = "30 ft"}', 8.0, 9.144),
    ('length = {low = "8 m", likely = "9 m", high = "12 m"}', 8.0, 12.0),
    ('length = {distribution = "uniform", loc = 0.9, scale = 0.4}', 9.0, 13.0),
    ('length = {distribution = "truncnorm", shapes = {a = -2, b = 2}, loc = 1, scale = 0.1}',
     8.0, 12.0),
])
def test_every_way_to_say_what_is_not_known(line: str, low: float, high: float) -> None:
    found = limits(spread_of(line).length.over(10.0))
    np.testing.assert_allclose(found, (low, high), rtol=2e-3)


def test_a_family_of_scipy_is_about_the_cases_own_value() -> None:
    made = spread_of('length = {distribution = "norm", loc = 1.0, scale = 0.05}').length.over(10.0)
    assert float(made.ppf(0.5)) == pytest.approx(10.0, rel=1e-12, abs=0)
    assert float(made.ppf(0.841344746)) == pytest.approx(10.5, rel=1e-8, abs=0)


@pytest.mark.parametrize(("line", "message"), [
    ('lenght = "5 %"', 'did you mean "length"'),
    ("length = {}", "must be a tolerance, low and high"),
    ('length = {low = "8 m"}', "must be a tolerance, low and high"),
    ('length = {likely = "8 m"}', "must be a tolerance, low and high"),
    ('length = {tolerance = "5 %", low = "8 m", high = "9 m"}', "must be a tolerance"),
    ('length = {low = "9 m", high = "8 m"}', "low must be below high"),
    ('length = {low = "8 m", likely = "12 m", high = "9 m"}', "rising order"),
    ('length = {low = "8 V", high = "9 m"}', "must be in m"),
    ('length = {distribution = "nrom"}', 'did you mean "norm"'),
    ('length = {distribution = "truncnorm", shapes = {a = "x"}}', "finite number"),
    ('coverage = "20 %"', "50 % to below 100 %"),
    ('coverage = 1.0', "50 % to below 100 %"),
    ('thickness = "10 %"', "is not a dimension that this cable gives"),
    ('gap = "10 %"', "is not a dimension that this cable gives"),
    ('bore = "10 %"', "is not a dimension that this cable gives"),
    ('loads = {"coil" = "10 %"}', "is not a load of this case"),
    ('length = "0 %"', "spread.length: must be above 0 and below 100 %; given 0 %."),
    ('length = "100 %"', "spread.length: must be above 0 and below 100 %; given 100 %."),
    ('loads = {"coil" = 1}', "must be above 0 and below 100 %; given 100 %."),
    ('length = {distribution = "norm", loc = 1, scale = 0.5}', "must stay above 0; given -"),
    ('length = {distribution = "norm", shapes = {a = 1}}', "does not take these shapes"),
])
def test_spread_is_refused(line: str, message: str) -> None:
    found = refusals(PAIR + f"[spread]\n{line}\n")
    assert any(message in sentence for sentence in found), found


OPERATION = """[[operation]]
name = "coil"
kind = "contactor"
from = "b@near"
to = "N"
rated_voltage = "230 V"
"""


def test_a_load_with_its_kind_and_with_its_own_thresholds() -> None:
    (entry,) = read_case(LOAD + OPERATION).content.operation
    assert entry.watched().limits == pytest.approx((46.0, 172.5), rel=1e-12, abs=0)
    own = OPERATION + 'off_voltage = "60 V"\non_voltage = "150 V"\n'
    assert read_case(LOAD + own).content.operation[0].watched().limits == (60.0, 150.0)
    lamp = changed(OPERATION, ('"contactor"', '"LED lamp"')) + (
        'off_current = "20 uA"\nconducts_from = "70 V"\nseries_capacitance = "330 nF"\n')
    found = read_case(LOAD + lamp).content.operation[0].watched()
    assert (found.limits[0], found.conducts_from, found.series_capacitance) == (
        pytest.approx(20e-6, rel=1e-12, abs=0), 70.0, pytest.approx(330e-9, rel=1e-12, abs=0))
    assert math.isinf(read_case(LOAD + OPERATION).content.operation[0].watched().series_capacitance)


@pytest.mark.parametrize(("change", "message"), [
    (('"contactor"', '"contactr"'), 'did you mean "contactor"'),
    (('rated_voltage = "230 V"\n', ""), "needs the rated voltage"),
    (('"b@near"', '"c@near"'), "is not a point of this case"),
    (('"230 V"\n', '"230 V"\noff_current = "1 mA"\n'), "does not apply to the kind contactor"),
    (('"230 V"\n', '"230 V"\noff_voltage = "200 V"\n'), "sure to be off at less than"),
    (('to = "N"', 'to = "b@near"'), "operation[1].to: must be another point than from; given b@"),
])
def test_a_load_is_refused(change: tuple[str, str], message: str) -> None:
    found = refusals(LOAD + changed(OPERATION, change))
    assert any(message in sentence for sentence in found), found


def test_a_load_is_refused_where_its_points_are_one() -> None:
    (said,) = refusals(LOAD + changed(OPERATION, ('"b@near"', '"a@near"'), ('"N"', '"L"')))
    assert said == ("c.toml line 30, operation[1].to: is the same point as from, as the ends are "
                    "described: nothing can be between them; given L.")


def test_a_lamps_series_capacitor_is_one() -> None:
    lamp = changed(OPERATION, ('"contactor"', '"LED lamp"'))
    assert refusals(LOAD + lamp + 'series_capacitance = "1 pF"\n') == []
    (said,) = refusals(LOAD + lamp + 'series_capacitance = "0 F"\n')
    assert "operation[1].series_capacitance: must be above 0 F. (leave it out where" in said


def test_loads_that_are_watched_have_names_of_their_own() -> None:
    assert refusals(LOAD + OPERATION + changed(OPERATION, ('"coil"', '"the same coil"'))) == []
    (said,) = refusals(LOAD + OPERATION + OPERATION)
    assert "operation[2].name: is used twice; given coil." in said


def test_a_load_without_impedance_is_no_relay_whichever_way_it_is_written() -> None:
    bare = changed(LOAD, ('b = {load = {name = "coil", resistance = "40 kohm"}, to = "N"}', "")) + (
        '[run.switching]\narrangement = "switched live"\nlive = "a"\nswitched = "b"\n'
        'load = {name = "coil"}\n')
    bare = changed(bare, ('[run.ends.near]\na = "L"\n', ""))
    for a, b in (("b@far", "N"), ("N", "b@far")):
        (said,) = refusals(bare + changed(OPERATION, ('"b@near"', f'"{a}"'), ('to = "N"',
                                                                             f'to = "{b}"')))
        assert "operation[1].kind: has an impedance, and the load there has only a name" in said


def test_loaded_neighbours() -> None:
    text = PAIR + '[[loaded]]\ngo = "a"\ncurrent = "16 A"\n'
    assert read_case(text).content.loaded[0].currents == {"a": 16}
    assert read_case(text + 'back = "b"\n').content.loaded[0].currents == {"a": 16, "b": -16}
    assert any("must be another conductor" in s for s in refusals(text + 'back = "a"\n'))
    assert any("is not a core" in s for s in refusals(text + 'back = "c"\n'))


def test_sizing() -> None:
    table = read_case(PAIR + '[sizing]\ncollapse_to = "10 V"\n').content.sizing
    assert table is not None
    assert (table.collapse_to, table.source_resistance, table.loading_error) == (10.0, 0.0, 0.05)
    wrong = PAIR + '[sizing]\ncollapse_to = "10 V"\nloading_error = "0 %"\n'
    assert any("above 0" in s for s in refusals(wrong))
    assert any("is missing" in s for s in refusals(PAIR + "[sizing]\nloading_error = 0.1\n"))
