"""Conductor sizes: areas in mm² (IEC 60228) and AWG (ASTM B258), plain copper."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Literal, get_args

from ..errors import Refused, nearest
from .records import Source, Value

Stranding = Literal["solid", "stranded", "flexible"]

COPPER_RESISTIVITY = Value(
    1 / 58e6, "Ω·m", Source("IEC 60028, standard annealed copper at 20 °C", "from memory")
)
COPPER_TEMPERATURE_COEFFICIENT = Value(
    3.93e-3, "1/K", Source("IEC 60028, at 20 °C and constant mass", "from memory")
)
AWG_STRANDED_RESISTANCE = Value(
    1.02, "", Source("ASTM B8, lay of a stranded conductor over a solid one", "from memory")
)

# IEC 60228 [Ω/km at 20 °C], plain copper. Classes 1 and 2 have the same limits.
_FIXED = {
    "0.5": 36.0, "0.75": 24.5, "1": 18.1, "1.5": 12.1, "2.5": 7.41, "4": 4.61, "6": 3.08,
    "10": 1.83, "16": 1.15, "25": 0.727, "35": 0.524, "50": 0.387, "70": 0.268, "95": 0.193,
    "120": 0.153, "150": 0.124, "185": 0.0991, "240": 0.0754, "300": 0.0601,
}  # fmt: skip
_FLEXIBLE = {
    "0.5": 39.0, "0.75": 26.0, "1": 19.5, "1.5": 13.3, "2.5": 7.98, "4": 4.95, "6": 3.30,
    "10": 1.91, "16": 1.21, "25": 0.780,
}  # fmt: skip
_SEEN = {"fixed": ("1", "1.5", "2.5"), "flexible": ("0.5", "0.75", "1", "1.5", "2.5", "4", "6")}
_LARGEST_SOLID = 16.0  # mm²; above it only mineral-insulated cable is solid

_AWG = {
    "4/0": -3, "3/0": -2, "2/0": -1, "1/0": 0, "1": 1, "2": 2, "3": 3, "4": 4, "6": 6, "8": 8,
    "10": 10, "12": 12, "14": 14, "16": 16, "18": 18, "20": 20, "22": 22, "24": 24,
}  # fmt: skip

# Effective over overall diameter of a strand, by its number of wires.
_STRAND_FACTORS = {1: 1.000, 7: 0.939, 19: 0.970, 37: 0.980, 61: 0.985, 91: 0.988}
STRAND_FACTOR_SOURCE = Source(
    "wire makers' design tables, concentric strand", "common practice"
)
# A bunch of many fine wires fills 3/4 of the circle round it: the limit of concentric layers.
BUNCH_FILL = Value(
    0.75, "", Source("overall diameter of a bunch = 1.155 d √n", "common practice"), 0.65, 0.80
)
# The outermost wires of a class 5 bunch are about as coarse, against the whole, as those of 37.
_BUNCH_LIKE = 37

_METRIC = re.compile(r"(\d+(?:\.\d+)?)\s*mm(?:²|2|\^2)", re.IGNORECASE)
_GAUGE = re.compile(r"(\d+(?:/0)?)\s*AWG", re.IGNORECASE)


@dataclass(frozen=True)
class Size:
    """A conductor's metal.

    Parameters
    ----------
    name : "2.5 mm²", "14 AWG"
    stranding : "solid", "stranded" (IEC class 2, ASTM class B) or "flexible" (class 5)
    radius : of the circle round the metal, which the insulation sits on [m]
    effective_radius : of the smooth wire with the same capacitance [m]
    area : of the metal, nominal [m²]
    resistance : DC at 20 °C [ohm/m]; the permitted maximum (mm²) or the nominal value (AWG)
    source : of area and resistance
    radius_source : of both radii
    """

    name: str
    stranding: Stranding
    radius: float
    effective_radius: float
    area: float
    resistance: float
    source: Source
    radius_source: Source

    def resistance_at(self, *, temperature: float) -> float:
        """DC resistance [ohm/m] at a copper temperature [°C], −50 to 250.

        >>> conductor_size("2.5 mm²").resistance_at(temperature=70)  # 7.41 mΩ/m × 1.1965
        0.008866065
        """
        if not -50 <= temperature <= 250:
            raise Refused("temperature", "must be −50 to 250 °C", given=f"{temperature:g} °C")
        return self.resistance * (1 + COPPER_TEMPERATURE_COEFFICIENT.likely * (temperature - 20))


def conductor_size(text: str, *, stranding: Stranding = "solid") -> Size:
    """The size that `text` names, from the table; a size not in the table is refused.

    `text` is such as "2.5 mm²", "2.5 mm2", "14 AWG" or "1/0 AWG". Raises `Refused` with the
    nearest size in the table. The overall radius follows from area and make-up (equal round
    wires in 1 + 6 + 12 … layers, not compacted), which agrees with printed diameters to about
    half a per cent. Sources: IEC 60228; ASTM B258.

    >>> size = conductor_size("14 AWG")
    >>> round(2 * size.radius * 1e3, 4), round(size.area * 1e6, 3)  # 0.127 mm × 92^(22/39)
    (1.6277, 2.081)
    """
    if stranding not in get_args(Stranding):
        raise Refused("stranding", "is not a known make-up", given=stranding,
                      hint=nearest(str(stranding), get_args(Stranding)))
    written = text.strip() if isinstance(text, str) else ""
    if metric := _METRIC.fullmatch(written):
        return _metric_size(float(metric[1]), stranding)
    if gauge := _GAUGE.fullmatch(written):
        return _awg_size(gauge[1], stranding)
    raise Refused("size", "must be an area in mm² or a gauge in AWG", given=text,
                  hint='write for example "2.5 mm²" or "14 AWG"')


def known_sizes(stranding: Stranding = "solid") -> tuple[str, ...]:
    """The names of every size in the table in this make-up, small to large, mm² before AWG.

    >>> known_sizes("flexible")[:3]
    ('0.5 mm²', '0.75 mm²', '1 mm²')
    """
    return (*(f"{a} mm²" for a in _areas(stranding)), *(f"{g} AWG" for g in reversed(_AWG)))


def strand_factor(strands: int) -> float:
    """Effective over overall diameter [1] of a concentric strand of 1, 7, 19, 37, 61 or 91 wires.

    Other numbers are refused. Source: wire makers' design tables (common practice).

    >>> strand_factor(7)
    0.939
    """
    if strands not in _STRAND_FACTORS:
        known = ", ".join(str(n) for n in _STRAND_FACTORS)
        raise Refused("strands", "has no factor in the table", given=strands,
                      hint=f"known: {known}")
    return _STRAND_FACTORS[strands]


def _areas(stranding: Stranding) -> list[str]:
    if stranding == "flexible":
        return list(_FLEXIBLE)
    return [a for a in _FIXED if stranding == "stranded" or float(a) <= _LARGEST_SOLID]


def _metric_size(area: float, stranding: Stranding) -> Size:
    name = f"{area:g}"
    if name not in _areas(stranding):
        near = min(_areas(stranding), key=lambda a: abs(float(a) - area))
        stranded = ", or ask for stranding stranded" if name in _FIXED else ""
        raise Refused("size", f"is not in the table of {stranding} conductors",
                      given=f"{name} mm²", hint=f'the nearest is "{near} mm²"{stranded}')
    table, family = (_FLEXIBLE, "flexible") if stranding == "flexible" else (_FIXED, "fixed")
    iec_class = {"solid": 1, "stranded": 2, "flexible": 5}[stranding]
    source = Source("IEC 60228", "seen" if name in _SEEN[family] else "from memory",
                    f"class {iec_class}")
    return _sized(f"{name} mm²", stranding, area * 1e-6, table[name] * 1e-3, source,
                  strands=7 if area <= 35 else 19 if area <= 95 else 37 if area <= 240 else 61)


def _awg_size(gauge: str, stranding: Stranding) -> Size:
    if gauge not in _AWG:
        number = 1 - int(gauge[:-2]) if "/" in gauge else int(gauge)
        near = min(_AWG, key=lambda g: abs(_AWG[g] - number))
        raise Refused("size", "is not in the table of gauges", given=f"{gauge} AWG",
                      hint=f'the nearest is "{near} AWG"')
    number = _AWG[gauge]
    area = math.pi / 4 * (0.127e-3 * 92 ** ((36 - number) / 39)) ** 2
    lay = 1.0 if stranding == "solid" else AWG_STRANDED_RESISTANCE.likely
    return _sized(f"{gauge} AWG", stranding, area, lay * COPPER_RESISTIVITY.likely / area,
                  Source("ASTM B258, with resistivity from IEC 60028", "from memory"),
                  strands=7 if number >= 2 else 19)


def _sized(
    name: str, stranding: Stranding, area: float, resistance: float, source: Source, *, strands: int
) -> Size:
    solid = math.sqrt(area / math.pi)
    if stranding == "solid":
        return Size(name, stranding, solid, solid, area, resistance, source,
                    Source("one round wire of the nominal area", "common practice"))
    if stranding == "flexible":
        radius = solid / math.sqrt(BUNCH_FILL.likely)
        return Size(name, stranding, radius, radius * strand_factor(_BUNCH_LIKE), area, resistance,
                    source, BUNCH_FILL.source)
    # n wires in k layers round one: n = 3 k (k + 1) + 1, and 2 k + 1 wires lie across.
    across = math.sqrt((4 * strands - 1) / 3)
    radius = solid * across / math.sqrt(strands)
    return Size(name, stranding, radius, radius * strand_factor(strands), area, resistance, source,
                Source(f"{strands} equal round wires, not compacted", "common practice"))
