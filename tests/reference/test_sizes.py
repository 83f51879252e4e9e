"""Conductor sizes against printed diameters, areas and resistances, and their resistivity."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest

from unlanded.errors import Refused
from unlanded.physics.closed_forms import coaxial
from unlanded.reference.sizes import (
    COPPER_RESISTIVITY,
    COPPER_TEMPERATURE_COEFFICIENT,
    conductor_size,
    known_sizes,
    strand_factor,
)

STRANDINGS = ("solid", "stranded", "flexible")
EVERY = [(name, how) for how in STRANDINGS for name in known_sizes(how)]


@pytest.mark.parametrize(
    ("gauge", "diameter", "area"),
    # Printed wire tables of ASTM B258 gauges (from memory), mil and circular mil.
    [("24", 20.1, 404), ("18", 40.3, 1620), ("14", 64.1, 4110), ("12", 80.8, 6530),
     ("10", 101.9, 10380), ("8", 128.5, 16510), ("6", 162.0, 26240), ("4", 204.3, 41740),
     ("2", 257.6, 66360), ("1/0", 324.9, 105600), ("4/0", 460.0, 211600)],
)  # fmt: skip
def test_gauges_as_printed(gauge, diameter, area):
    size = conductor_size(f"{gauge} AWG")
    # Half the last digit; the areas of the table come from diameters rounded to 0.1 mil.
    assert 2 * size.radius / 25.4e-6 == pytest.approx(diameter, rel=0.05 / diameter, abs=0)
    circular_mil = math.pi / 4 * (25.4e-6) ** 2
    assert size.area / circular_mil == pytest.approx(area, rel=2 * 0.05 / diameter + 5e-4, abs=0)


@pytest.mark.parametrize(
    ("gauge", "ohm_per_km"),
    # Printed wire tables at 20 °C (from memory).
    [("18", 20.95), ("14", 8.286), ("12", 5.211), ("10", 3.277), ("6", 1.296), ("1/0", 0.3224)],
)
def test_gauge_resistance_as_printed(gauge, ohm_per_km):
    size = conductor_size(f"{gauge} AWG")
    assert size.resistance == pytest.approx(ohm_per_km * 1e-3, rel=2e-4, abs=0)


@pytest.mark.parametrize(
    ("name", "how", "diameter"),
    # Trade tables of IEC 60228 conductors (common practice), mm: rounded to 0.01 mm per wire,
    # so to 0.005 mm for each wire that lies across.
    [("1 mm²", "solid", 1.13), ("1.5 mm²", "solid", 1.38), ("2.5 mm²", "solid", 1.78),
     ("4 mm²", "solid", 2.25), ("6 mm²", "solid", 2.76), ("4 mm²", "stranded", 2.55),
     ("6 mm²", "stranded", 3.12), ("10 mm²", "stranded", 4.05), ("16 mm²", "stranded", 5.13)],
)  # fmt: skip
def test_metric_diameters_as_printed(name, how, diameter):
    across = 1 if how == "solid" else 3
    size = conductor_size(name, stranding=how)
    # 4 mm² is 2.257 mm and printed as 2.25: cut, not rounded, hence 0.008 for solid wires.
    allowed = max(0.008, 0.005 * across)
    assert 2e3 * size.radius == pytest.approx(diameter, rel=allowed / diameter, abs=0)


@pytest.mark.parametrize(
    ("gauge", "inch"),
    # NFPA 70 (NEC), chapter 9, table 8, class B stranding (from memory).
    [("14", 0.073), ("12", 0.092), ("10", 0.116), ("8", 0.146), ("6", 0.184), ("4", 0.232),
     ("2", 0.292), ("1", 0.332), ("1/0", 0.372), ("4/0", 0.528)],
)  # fmt: skip
def test_stranded_gauges_as_printed(gauge, inch):
    size = conductor_size(f"{gauge} AWG", stranding="stranded")
    # 0.001 in: the table rounds each wire first (1/0 is 0.3726 and printed 0.372).
    assert 2 * size.radius / 0.0254 == pytest.approx(inch, rel=0.001 / inch, abs=0)


@pytest.mark.parametrize(
    ("area", "largest"),
    # IEC 60228, annex C, greatest diameter of flexible conductors (from memory), mm.
    [("0.5", 1.1), ("0.75", 1.3), ("1", 1.5), ("1.5", 1.8), ("2.5", 2.6), ("4", 3.2), ("6", 3.9),
     ("10", 5.1), ("16", 6.3), ("25", 7.8)],
)  # fmt: skip
def test_flexible_conductors_keep_within_the_standard(area, largest):
    size = conductor_size(f"{area} mm²", stranding="flexible")
    assert 0.7 * largest < 2e3 * size.radius < largest


@pytest.mark.parametrize(("name", "how"), EVERY)
def test_every_size_holds_together(name, how):
    size = conductor_size(name, stranding=how)
    assert (size.name, size.stranding) == (name, how)
    # Resistance × area is the resistivity of copper, and up to 16 % above it where the standard
    # allows for lay, fine wires and wires drawn thin.
    ratio = size.resistance * size.area / COPPER_RESISTIVITY.likely
    assert 1 - 1e-12 <= ratio <= 1.16
    # The metal fits inside its circle, and fills at least two thirds of it.
    fill = size.area / (math.pi * size.radius**2)
    assert 2 / 3 < fill <= 1 + 1e-12
    assert 0.93 * size.radius < size.effective_radius <= size.radius
    assert size.source.title
    assert size.radius_source.standing == "common practice"


@pytest.mark.parametrize("how", STRANDINGS)
def test_sizes_rise(how):
    for unit in ("mm²", "AWG"):
        sizes = [conductor_size(n, stranding=how) for n in known_sizes(how) if unit in n]
        for smaller, larger in pairwise(sizes):
            assert smaller.area < larger.area
            assert smaller.radius < larger.radius
            assert smaller.resistance > larger.resistance


@pytest.mark.parametrize(
    ("area", "how", "ohm_per_km"),
    # IEC 60228, tables 1 to 3, plain copper (seen).
    [("1", "solid", 18.1), ("1.5", "stranded", 12.1), ("2.5", "solid", 7.41),
     ("0.5", "flexible", 39.0), ("1.5", "flexible", 13.3), ("6", "flexible", 3.30)],
)  # fmt: skip
def test_resistance_as_printed(area, how, ohm_per_km):
    size = conductor_size(f"{area} mm²", stranding=how)
    assert size.resistance == pytest.approx(ohm_per_km * 1e-3, rel=1e-12, abs=0)
    assert size.source.standing == "seen"


def test_strand_factor_of_a_catalogue_coax():
    # 50 Ω coax of the 10 mm class: seven wires 2.25 mm over all, 7.24 mm of PE at 2.26;
    # catalogues say 101 pF/m (from memory). 1.5 %: catalogue dimensions are nominal.
    c = coaxial(inner=strand_factor(7) * 1.125e-3, outer=3.62e-3, permittivity=2.26)
    assert c == pytest.approx(101e-12, rel=0.015, abs=0)


def test_strand_factor_by_count():
    factors = [strand_factor(n) for n in (7, 19, 37, 61, 91)]
    assert factors == sorted(factors)
    assert strand_factor(1) == 1.0
    with pytest.raises(Refused, match="strands: has no factor in the table; given 8"):
        strand_factor(8)


@pytest.mark.parametrize(
    ("text", "name"),
    [("2.5 mm²", "2.5 mm²"), ("2.5mm2", "2.5 mm²"), (" 2.50 MM^2 ", "2.5 mm²"),
     ("1.0 mm2", "1 mm²"), ("14 AWG", "14 AWG"), ("14awg", "14 AWG"), ("1/0 AWG", "1/0 AWG")],
)  # fmt: skip
def test_ways_to_write_a_size(text, name):
    assert conductor_size(text).name == name


@pytest.mark.parametrize(
    ("text", "how", "message"),
    [
        ("2.6 mm²", "solid", 'given 2.6 mm².*nearest is "2.5 mm²"'),
        ("25 mm²", "solid", 'nearest is "16 mm²", or ask for stranding stranded'),
        ("35 mm²", "flexible", 'nearest is "25 mm²"'),
        ("400 mm²", "stranded", 'nearest is "300 mm²"'),
        ("0 mm²", "solid", 'nearest is "0.5 mm²"'),
        ("13 AWG", "solid", 'given 13 AWG.*nearest is "1[24] AWG"'),
        ("26 AWG", "solid", 'nearest is "24 AWG"'),
        ("5/0 AWG", "solid", 'nearest is "4/0 AWG"'),
        ("0 AWG", "solid", 'nearest is "1/0 AWG"'),
        ("2,5 mm²", "solid", "must be an area in mm² or a gauge in AWG; given 2,5 mm²"),
        ("-2.5 mm²", "solid", "must be an area"),
        ("250 kcmil", "solid", "must be an area"),
        ("2.5", "solid", "must be an area"),
        ("", "solid", "must be an area"),
        (2.5, "solid", "must be an area"),
        ("2.5 mm²", "strand", 'stranding: is not a known make-up.*"stranded"'),
    ],
)
def test_sizes_not_in_the_table_are_refused(text, how, message):
    with pytest.raises(Refused, match=message):
        conductor_size(text, stranding=how)


def test_edges_of_the_tables_are_accepted():
    assert conductor_size("16 mm²").area == pytest.approx(16e-6, rel=1e-12, abs=0)
    assert conductor_size("25 mm²", stranding="flexible").name == "25 mm²"
    assert conductor_size("300 mm²", stranding="stranded").name == "300 mm²"
    assert conductor_size("4/0 AWG").name == "4/0 AWG"


def test_resistance_rises_with_temperature():
    size = conductor_size("1.5 mm²")
    assert size.resistance_at(temperature=20) == size.resistance
    # IEC 60364 practice: 1.20 × from 20 to 70 °C (from memory, two digits).
    ratio = size.resistance_at(temperature=70) / size.resistance
    assert ratio == pytest.approx(1.20, rel=0.005 / 1.2, abs=0)
    # 1/α − 20 °C is copper's zero-resistance temperature, −234.5 °C (IEC 60028, from memory).
    zero = 20 - 1 / COPPER_TEMPERATURE_COEFFICIENT.likely
    assert zero == pytest.approx(-234.5, rel=0.05 / 234.5, abs=0)
    assert size.resistance_at(temperature=250) > size.resistance_at(temperature=-50)
    for past in (-50.1, 250.1, math.nan):
        with pytest.raises(Refused, match="temperature: must be −50 to 250 °C"):
            size.resistance_at(temperature=past)
