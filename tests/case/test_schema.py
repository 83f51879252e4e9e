"""The tables of a case: what each takes, and what it refuses."""

from __future__ import annotations

import pytest

from case_text import NAMES, SITES, changed, refusals, site
from unlanded.case.loading import load_case, read_case

QUAY, LARKMOOR = site("tern-quay"), site("larkmoor")
OWN = '[[own_instruments]]\nkey = "a"\nname = "b"\n'


def with_own(text: str) -> str:
    return f"{QUAY}\n{OWN}{text}"


@pytest.mark.parametrize("name", NAMES)
def test_every_demo_site_is_valid_and_says_that_it_is_invented(name: str) -> None:
    content = load_case(SITES / f"{name}.toml").content
    assert "(invented)" in content.site
    assert "The site is invented, and so are the readings." in " ".join(content.notes.split())


def test_the_supply_has_harmonics_and_an_impedance() -> None:
    supply = read_case(site("heron-house")).content.supply
    assert supply.harmonics == {3: 0.015, 5: 0.04, 7: 0.02}
    assert supply.resistance == pytest.approx(0.2, rel=1e-12, abs=0)
    assert supply.inductance == pytest.approx(0.3e-3, rel=1e-12, abs=0)


@pytest.mark.parametrize(("written", "says"), [
    ('harmonics = {1 = "5 %"}', "supply.harmonics.1: must be the order of a harmonic, a whole "
                                'number from 2 to 50; given 1. (for example 3 = "5 %")'),
    ("harmonics = {51 = 0.1}", "supply.harmonics.51: must be the order of a harmonic"),
    ("harmonics = {03 = 0.1}", "supply.harmonics.03: must be the order of a harmonic"),
    ("harmonics = {3 = 1.01}", "supply.harmonics.3: must be 0 to 1; given 1.01."),
    ('harmonics = {3 = "-1 %"}', "supply.harmonics.3: must be 0 to 1; given -1 %."),
    ("harmonics = {3 = nan}", "supply.harmonics.3: must be a finite number; given nan."),
    ('harmonics = {3 = "5 V"}', "supply.harmonics.3: must be a pure number or a percentage"),
    ("harmonics = [0.1]", "supply.harmonics: must be a table; given a list. (written "
                          "[supply.harmonics] or harmonics = {…})"),
    ('resistance = "-1 ohm"', "supply.resistance: must be 0 Ω to 10 kΩ; given -1 ohm."),
    ('resistance = "11 kohm"', "supply.resistance: must be 0 Ω to 10 kΩ; given 11 kohm."),
    ('inductance = "11 H"', "supply.inductance: must be 0 H to 10 H; given 11 H."),
    ('inductance = "1 F"', "supply.inductance: must be in H or a unit that converts to it;"),
])  # fmt: skip
def test_a_mistake_in_the_supply_is_told_at_it(written: str, says: str) -> None:
    (said,) = refusals(changed(QUAY, ("phases = 1 ", f"{written} ")))
    assert says in said


@pytest.mark.parametrize("written", [
    'harmonics = {2 = 0, 50 = 1}', 'resistance = "0 ohm"', 'resistance = "10 kohm"',
    'inductance = "10 H"',
])  # fmt: skip
def test_the_supply_at_its_limits_is_taken(written: str) -> None:
    assert refusals(changed(QUAY, ("phases = 1 ", f"{written} "))) == []


def test_an_own_instrument_is_what_its_data_sheet_says() -> None:
    (own,) = read_case(LARKMOOR).content.own_instruments
    made = own.instrument()
    assert made.burden_at(41.2).resistance == 1e6
    # 1.5 % of 41.2 V + 5 × 0.1 V
    assert made.accuracy_at(41.2) == pytest.approx(1.118, rel=1e-12, abs=0)


@pytest.mark.parametrize(("written", "says"), [
    ("", 'resistance: is missing. (for example resistance = "10 Mohm")'),
    ('inductance = "1 H"\ncapacitance = "1 nF"', "resistance: is missing: the inductance is in"),
    ('resistance = "0 ohm"', "own_instruments[1]: a resistance of 0 Ω is a bond."),
    ('resistance = "1 kohm"\npercent = "100 %"', "percent: must be 0 to below 1; given 1."),
    ('resistance = "1 kohm"\nthreshold = "5 V"', "threshold: does not apply to kind digital"),
    ('resistance = "1 kohm"\nkind = "indicator"', "threshold: is needed by kind indicator."),
    ('resistance = "1 kohm"\nkind = "digitl"', 'did you mean "digital"?'),
    ('resistance = "1 kohm"\ncounts = 1.5', "counts: must be a whole number from 0 to 10000"),
    ('resistance = "1 kohm"\nresolution = "2 V"\nfull_scale = "1 V"',
     "resolution: must be 0 V to the full scale; given 2 V."),
    ('kind = "proximity"\nthreshold = "50 V"\nresistance = "1 kohm"',
     "own_instruments[1]: a proximity detector has none."),
    (f'resistance = "1 kohm"\n{OWN}resistance = "2 kohm"', "own_instruments[2].key: is used twice"),
])  # fmt: skip
def test_a_mistake_in_an_own_instrument_is_told_at_it(written: str, says: str) -> None:
    said = refusals(with_own(written))
    assert len(said) == 1
    assert says in said[0]


def test_an_own_instrument_takes_no_key_of_the_kit() -> None:
    (said,) = refusals(with_own('resistance = "1 kohm"').replace('key = "a"', 'key = "body"'))
    assert "own_instruments[1].key: is already an instrument of the kit; given body." in said


@pytest.mark.parametrize(("change", "says"), [
    (('"digital-10M", "bench', '"digital-10m", "bench'), 'did you mean "digital-10M"?'),
    (('"digital-10M", "bench', '"bench-1M", "bench'), "each instrument may be listed once; given"),
    (('kind = "general"', 'kind = "generic"'), 'did you mean "general"?'),
    (('waveform = "A"', 'waveform = "a"'), 'did you mean "A"?'),
    (('rated = "30 mA"', 'rated = "30 V"'), "device.rated: must be in A or a unit that converts"),
    (('units = "metric"', 'units = "imperial"'), "must be metric or US customary; given imperial."),
    (('from = "black@far"', 'from = "black"'), 'did you mean "black@far"?'),
    (('from = "black@far"', 'from = "blak@far"'), 'did you mean "black@far"?'),
    (('to = "earth"', 'to = "black@far"'), "readings[1].to: must be another point than from"),
    (('from = "black@far"', 'from = "green-yellow@near"'),
     "readings[1].to: is the same point as from, as the ends are described: nothing can be "
     "between them; given earth."),
    (('instrument = "digital-10M"', 'instrument = "body"'), "shows nothing that can be read;"),
    (('instrument = "digital-10M"', 'instrument = "two-pole"'),
     'readings[1].shows: must be "lit" or "not lit" for kind indicator; given 107.9 V.'),
])  # fmt: skip
def test_a_mistake_in_other_tables_is_told_at_it(change: tuple[str, str], says: str) -> None:
    (said,) = refusals(changed(QUAY, change))
    assert says in said


def test_a_metal_conduit_has_no_second_surround() -> None:
    (said,) = refusals(changed(site("heron-house"), ("[run.ends.near]",
                               '[run.surround]\nkind = "plane"\n[run.ends.near]')))
    assert "run.surround: is given twice: a metal conduit is the surround itself." in said
