"""Insulating materials at 20 °C and 50/60 Hz, and how thick they are on a conductor."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ..errors import Refused, nearest
from .records import Source, Value
from .sizes import Size

_TRADE = Source("cable makers' material tables", "common practice")
_SINGLE = Source("cable makers' material tables, one figure; ±10 % taken here", "common practice")
_RATING = Source("IEC 60287-1-1", "from memory", "table 3")
_RECALLED = Source("polymer data sheets", "from memory")


@dataclass(frozen=True)
class Material:
    """An insulating material: relative permittivity and loss tangent, each with its range.

    `loss_tangent` is None where no figure was found.
    """

    name: str
    permittivity: Value
    loss_tangent: Value | None = None


def _material(
    name: str,
    permittivity: tuple[float, float, float],
    loss: tuple[float, float, float] | None = None,
    source: Source = _TRADE,
    loss_source: Source = _TRADE,
) -> Material:
    def value(range_: tuple[float, float, float], where: Source) -> Value:
        low, likely, high = range_
        return Value(likely, "", where, low, high)

    return Material(name, value(permittivity, source), loss and value(loss, loss_source))


def _single(name: str, permittivity: float) -> Material:
    return _material(name, (0.9 * permittivity, permittivity, 1.1 * permittivity), source=_SINGLE)


# PVC: the trade gives 3.6 to 6 for the 70 °C grade and 4 to 8 on other pages; it rises with
# temperature and plasticiser. IEC 60287's 8 is a hot, lossy figure for ratings, not for 20 °C.
MATERIALS: Mapping[str, Material] = {
    m.name: m
    for m in (
        _material("PVC", (3.5, 4.8, 6.5), (0.04, 0.07, 0.10)),
        _material("PVC 90 °C", (4.0, 5.2, 6.5), (0.04, 0.07, 0.10)),
        _material("PE", (2.26, 2.3, 2.3), (0.0002, 0.0005, 0.001)),
        _material("XLPE", (2.3, 2.4, 2.5), (0.0005, 0.001, 0.004)),
        _material("EPR", (2.8, 3.0, 3.5), (0.005, 0.01, 0.02)),
        Material("butyl rubber", _single("butyl rubber", 4.0).permittivity,
                 Value(0.05, "", _RATING)),
        _single("natural rubber", 5.0),
        _single("SBR", 4.0),
        _single("silicone rubber", 3.1),
        _single("PTFE", 2.1),
        Material("FEP", _single("FEP", 2.1).permittivity, Value(0.0003, "", _TRADE)),
        _single("ETFE", 2.6),
        _single("PP", 2.25),
        _single("PUR", 6.5),
        _single("PVDF", 7.7),
        _material("nylon", (3.5, 5.0, 8.0), (0.02, 0.05, 0.1), _RECALLED, _RECALLED),
        _material("impregnated paper", (3.5, 3.7, 4.0), (0.0035, 0.005, 0.01), _RATING, _RATING),
    )
}


def material(name: str) -> Material:
    """The material of that name; unknown ones are refused with the nearest known.

    >>> str(material("PVC").permittivity)
    '4.8 (3.5 to 6.5)'
    """
    if name not in MATERIALS:
        raise Refused("insulation", "is not a known material", given=name,
                      hint=nearest(str(name), MATERIALS))
    return MATERIALS[name]


@dataclass(frozen=True)
class Cover:
    """A cable type's insulation: its material and its nominal thickness [m] by size name.

    `shortfall` [m] is what the thinnest point may lack beyond 10 % of the nominal thickness.
    """

    kind: str
    material: str
    thicknesses: Mapping[str, float]
    source: Source
    shortfall: float


def _metric(kind: str, material: str, sizes: Mapping[float, str], source: Source) -> Cover:
    """From nominal thickness in mm to sizes in mm². IEC: at least 0.9 t − 0.1 mm anywhere."""
    table = {f"{s} mm²": t * 1e-3 for t, names in sizes.items() for s in names.split()}
    return Cover(kind, material, table, source, 0.1e-3)


def _gauge(kind: str, material: str, sizes: Mapping[float, str], source: Source) -> Cover:
    """From nominal thickness in mil (0.0254 mm) to gauges. UL: at least 0.9 t anywhere."""
    table = {f"{s} AWG": t * 25.4e-6 for t, names in sizes.items() for s in names.split()}
    return Cover(kind, material, table, source, 0.0)


# THHN is PVC under nylon (15 + 4 mil on 14 AWG): the sum, since nylon's permittivity is like
# that of PVC.
_THHN: Mapping[float, str] = {
    19: "14 12", 24: "10", 35: "8 6", 46: "4 3 2", 57: "1 1/0 2/0 3/0 4/0",
}  # fmt: skip
_UL_83 = Source("UL 83, PVC and nylon together", "seen")
_NEC = Source("NFPA 70 (NEC)", "from memory", "table 310.4(1)", 2023)
_IEC_60502 = Source("IEC 60502-1", "seen")

COVERS: Mapping[str, Cover] = {
    c.kind: c
    for c in (
        _metric("H05V", "PVC", {0.6: "0.5 0.75 1"}, Source("EN 50525-2-31", "from memory")),
        _metric("H07V", "PVC", {0.7: "1.5", 0.8: "2.5 4 6", 1.0: "10 16", 1.2: "25 35",
                                1.4: "50 70", 1.6: "95"}, Source("IEC 60227-3", "from memory")),
        _metric("H05VV", "PVC", {0.6: "0.75 1", 0.7: "1.5", 0.8: "2.5"},
                Source("IEC 60227-5", "from memory")),
        _metric("H07RN", "EPR", {0.8: "1 1.5", 0.9: "2.5", 1.0: "4 6", 1.2: "10"},
                Source("IEC 60245-4, code 66", "from memory")),
        _metric("PVC 0.6/1 kV", "PVC", {0.8: "1.5 2.5", 1.0: "4 6 10 16", 1.2: "25 35",
                                        1.4: "50 70", 1.6: "95 120", 1.8: "150", 2.0: "185",
                                        2.2: "240", 2.4: "300"}, _IEC_60502),
        _metric("XLPE 0.6/1 kV", "XLPE", {0.7: "1.5 2.5 4 6 10 16", 0.9: "25 35", 1.0: "50",
                                          1.1: "70 95", 1.2: "120", 1.4: "150", 1.6: "185",
                                          1.7: "240", 1.8: "300"}, _IEC_60502),
        _metric("EPR 0.6/1 kV", "EPR", {1.0: "1.5 2.5 4 6 10 16", 1.2: "25 35", 1.4: "50"},
                _IEC_60502),
        _metric("HEPR 0.6/1 kV", "EPR", {0.7: "1.5 2.5 4 6 10 16", 0.9: "25 35", 1.0: "50"},
                _IEC_60502),
        _metric("PVC control", "PVC", {0.8: "1.5", 0.9: "2.5"},
                Source("makers' tables of control cable", "common practice")),
        _gauge("THHN", "PVC 90 °C", _THHN, _UL_83),
        _gauge("NM-B", "PVC 90 °C", _THHN,
               Source("cores as THHN, UL 83, PVC and nylon together", "seen")),
        _gauge("TW", "PVC", {30: "14 12 10", 45: "8", 60: "6 4 3 2", 80: "1 1/0 2/0 3/0 4/0"},
               _NEC),
        _gauge("XHHW", "XLPE", {30: "14 12 10", 45: "8 6 4 3 2", 55: "1 1/0 2/0 3/0 4/0"}, _NEC),
    )
}


def cover(kind: str) -> Cover:
    """The insulation of a cable type; unknown ones are refused with the nearest known.

    >>> cover("XHHW").material
    'XLPE'
    """
    if kind not in COVERS:
        raise Refused("cable type", "is not known", given=kind, hint=nearest(str(kind), COVERS))
    return COVERS[kind]


def thickness(kind: str, size: Size) -> Value:
    """Insulation thickness [m] of a cable type on a conductor size; refused when not in its table.

    `likely` is the nominal figure, `low` what the standard lets the thinnest point be (0.9 t,
    for IEC types less 0.1 mm), `high` 1.1 t (common practice).

    >>> from .sizes import conductor_size
    >>> str(thickness("H07V", conductor_size("2.5 mm²")))
    '800 µm (620 µm to 880 µm)'
    """
    found = cover(kind)
    if size.name not in found.thicknesses:
        raise Refused("size", f"has no insulation thickness in the table of {kind}",
                      given=size.name, hint=f"known: {', '.join(found.thicknesses)}")
    nominal = found.thicknesses[size.name]
    return Value(nominal, "m", found.source, 0.9 * nominal - found.shortfall, 1.1 * nominal)
