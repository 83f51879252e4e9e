"""Insulation against printed overall diameters, and the order of its ranges."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.reference.insulation import COVERS, MATERIALS, cover, material, thickness
from unlanded.reference.sizes import conductor_size

MM, MIL = 1e-3, 25.4e-6


@pytest.mark.parametrize(
    ("kind", "gauge", "inch"),
    # NFPA 70 (NEC) 2008, chapter 9, table 5, outer diameters of stranded building wire (seen in
    # a public copy).
    [("THHN", "14", 0.111), ("THHN", "12", 0.130), ("THHN", "10", 0.164), ("THHN", "8", 0.216),
     ("THHN", "6", 0.254), ("THHN", "4", 0.324), ("THHN", "2", 0.384), ("THHN", "1", 0.446),
     ("THHN", "1/0", 0.486), ("THHN", "4/0", 0.642),
     ("TW", "14", 0.133), ("TW", "12", 0.152), ("TW", "10", 0.176), ("TW", "8", 0.236),
     ("TW", "6", 0.304), ("TW", "3", 0.380), ("TW", "1", 0.492), ("TW", "4/0", 0.688),
     ("XHHW", "14", 0.133), ("XHHW", "8", 0.236), ("XHHW", "6", 0.274), ("XHHW", "2", 0.382),
     ("XHHW", "1", 0.442), ("XHHW", "4/0", 0.638)],
)  # fmt: skip
def test_building_wire_has_its_printed_outer_diameter(kind, gauge, inch):
    size = conductor_size(f"{gauge} AWG", stranding="stranded")
    over_all = 2 * (size.radius + thickness(kind, size).likely)
    # 0.001 in: the table adds rounded figures.
    assert over_all / 0.0254 == pytest.approx(inch, rel=0.001 / inch, abs=0)


@pytest.mark.parametrize(("gauge", "inch"), [("14", 0.105), ("12", 0.122), ("10", 0.153)])
def test_solid_thhn_lies_within_its_range(gauge, inch):
    # Makers' finished diameters of solid THHN (common practice): thicker than the least
    # average that UL 83 asks for.
    size = conductor_size(f"{gauge} AWG")
    made = inch * 0.0254 / 2 - size.radius
    t = thickness("THHN", size)
    assert t.low < made < t.high


@pytest.mark.parametrize(
    ("kind", "name", "millimetres"),
    [
        # IEC 60227-3 and -5 (from memory).
        ("H07V", "1.5 mm²", 0.7), ("H07V", "6 mm²", 0.8), ("H07V", "16 mm²", 1.0),
        ("H07V", "95 mm²", 1.6), ("H05VV", "0.75 mm²", 0.6), ("H05VV", "1.5 mm²", 0.7),
        # IEC 60502-1 (seen).
        ("PVC 0.6/1 kV", "2.5 mm²", 0.8), ("PVC 0.6/1 kV", "4 mm²", 1.0),
        ("PVC 0.6/1 kV", "300 mm²", 2.4), ("XLPE 0.6/1 kV", "16 mm²", 0.7),
        ("XLPE 0.6/1 kV", "25 mm²", 0.9), ("XLPE 0.6/1 kV", "300 mm²", 1.8),
        ("EPR 0.6/1 kV", "50 mm²", 1.4), ("HEPR 0.6/1 kV", "50 mm²", 1.0),
    ],
)  # fmt: skip
def test_metric_thickness_as_printed(kind, name, millimetres):
    t = thickness(kind, conductor_size(name, stranding="stranded"))
    assert t.likely == pytest.approx(millimetres * MM, rel=1e-12, abs=0)
    # IEC 60227-1 and 60502-1 (from memory): no point thinner than 0.9 t − 0.1 mm.
    assert t.low == pytest.approx((0.9 * millimetres - 0.1) * MM, rel=1e-12, abs=0)
    assert t.unit == "m"


def test_layers_of_thhn_are_added():
    # UL 83 (seen): 14 AWG, 15 mil of PVC and 4 mil of nylon.
    t = thickness("THHN", conductor_size("14 AWG"))
    assert t.likely == pytest.approx(19 * MIL, rel=1e-12, abs=0)
    assert t == thickness("THHN", conductor_size("14 AWG", stranding="stranded"))


@pytest.mark.parametrize("kind", COVERS)
def test_every_cover_holds_together(kind):
    found = cover(kind)
    assert found.kind == kind
    assert found.material in MATERIALS
    stranding = "solid" if found.shortfall == 0 else "stranded"
    values = []
    for name in found.thicknesses:
        t = thickness(kind, conductor_size(name, stranding=stranding))
        assert 0.3 * MM < t.low < t.likely < t.high < 3 * MM
        values.append(t.likely)
    # No thinner on a larger conductor.
    assert values == sorted(values)


@pytest.mark.parametrize("name", MATERIALS)
def test_every_material_holds_together(name):
    found = material(name)
    assert found.name == name
    assert 2 * 0.9 < found.permittivity.low <= found.permittivity.high < 9
    assert found.permittivity.unit == ""
    if found.loss_tangent is not None:
        assert 0 < found.loss_tangent.low <= found.loss_tangent.high <= 0.1


def test_pvc_at_20_degrees():
    # The range agreed for PVC at 20 °C and power frequency (common practice).
    e = material("PVC").permittivity
    assert (e.low, e.likely, e.high) == (3.5, 4.8, 6.5)
    assert e.source.standing == "common practice"


@pytest.mark.parametrize(
    ("name", "permittivity", "loss"),
    # IEC 60287-1-1, table 3 (from memory): within the ranges given here.
    [("PE", 2.3, 0.001), ("XLPE", 2.5, 0.004), ("EPR", 3.0, 0.020), ("butyl rubber", 4.0, 0.05)],
)
def test_rating_figures_lie_in_the_ranges(name, permittivity, loss):
    found = material(name)
    assert found.permittivity.low <= permittivity <= found.permittivity.high
    assert found.loss_tangent.low <= loss <= found.loss_tangent.high


def test_unknown_names_are_refused_with_the_nearest():
    with pytest.raises(Refused, match=r'insulation: is not a known material; given PCV.*"PVC"'):
        material("PCV")
    with pytest.raises(Refused, match=r'cable type: is not known; given THNN.*"THHN"'):
        thickness("THNN", conductor_size("14 AWG"))


def test_sizes_outside_a_table_are_refused():
    size = conductor_size("95 mm²", stranding="stranded")
    assert thickness("H07V", size).likely == pytest.approx(1.6e-3, rel=1e-12, abs=0)
    with pytest.raises(Refused, match=r"table of H07V; given 120 mm².*known: 1.5 mm²"):
        thickness("H07V", conductor_size("120 mm²", stranding="stranded"))
    with pytest.raises(Refused, match=r"size: has no insulation thickness.*given 14 AWG"):
        thickness("H07V", conductor_size("14 AWG"))
