"""Touch current, voltage and standing leakage: published limits, each with its source.

They are limits of documents, for healthy people and the conditions those documents name. A
value below a limit is not a finding that a circuit may be touched.
"""

from __future__ import annotations

from collections.abc import Mapping

from ..errors import Refused
from .records import Source, Value

_EFFECTS = Source("IEC 60479-1", "from memory", year=2018)
PERCEPTION_CURRENT = Value(0.5e-3, "A", Source("IEC 60479-1", "seen", "15 to 100 Hz", 2018))
LET_GO_CURRENT = Value(5e-3, "A", Source("IEC 60479-1", "from memory",
                                         "curve b; 5 mA whole population, 10 mA adult males",
                                         2018), high=10e-3)
FIBRILLATION_CURRENT = Value(
    40e-3, "A", Source("IEC 60479-1", "from memory", "curve c1, above 1 to 3 s, hand to feet", 2018)
)

# The document prints 5, 50 and 95 % of people, hand to hand, large dry contact, 50/60 Hz.
BODY_IMPEDANCE: Mapping[float, Value] = {
    voltage: Value(likely, "Ω", _EFFECTS, low, high)
    for voltage, low, likely, high in (
        (25.0, 1750, 3250, 6100), (50.0, 1375, 2500, 4600), (75.0, 1125, 2000, 3600),
        (100.0, 990, 1725, 3125), (125.0, 900, 1550, 2675), (150.0, 850, 1400, 2350),
        (200.0, 800, 1275, 2050), (225.0, 775, 1225, 1900), (400.0, 700, 950, 1275),
        (700.0, 575, 775, 1050),
    )
}  # fmt: skip

_NETWORK = Source("IEC 60990", "seen", "touch-current measuring network")
BODY_FRONT_RESISTANCE = Value(500.0, "Ω", _NETWORK)
BODY_SHUNT_RESISTANCE = Value(1500.0, "Ω", _NETWORK)
BODY_CAPACITANCE = Value(0.22e-6, "F", _NETWORK)
NETWORK_VOLTMETER_RESISTANCE = Value(1e6, "Ω", _NETWORK)  # at least
NETWORK_VOLTMETER_CAPACITANCE = Value(200e-12, "F", _NETWORK)  # at most

_ELV = Source("IEC 61243-3", "seen", year=2014)
EXTRA_LOW_VOLTAGE_AC = Value(50.0, "V", _ELV)
EXTRA_LOW_VOLTAGE_DC = Value(120.0, "V", _ELV)
INTERFERENCE_BOUNDARY = Value(100e3, "Ω", _ELV)  # low-impedance testers lie below it

_INDUCED = Source("OSHA rules on induced voltage on de-energised lines", "seen")
INVOLUNTARY_REACTION_CURRENT = Value(1e-3, "A", _INDUCED)  # with no precaution against it
GUARDED_REACTION_CURRENT = Value(6e-3, "A", _INDUCED)  # where the reaction is guarded against
INDUCED_TEST_RESISTANCE = Value(500.0, "Ω", _INDUCED)
VEHICLE_CURRENT = Value(
    5e-3, "A", Source("NESC, vehicles under lines above 98 kV to ground", "from memory")
)

_IMPEDANCE = Source("IEC 60335-1", "seen", "protective impedance")
PROTECTIVE_IMPEDANCE_CURRENT_PEAK = Value(0.7e-3, "A", _IMPEDANCE)
PROTECTIVE_IMPEDANCE_CURRENT_DC = Value(2e-3, "A", _IMPEDANCE)
STORED_CHARGE = Value(45e-6, "C", _IMPEDANCE)  # to 15 kV peak
STORED_ENERGY = Value(0.35, "J", _IMPEDANCE)  # above 15 kV peak
_CHARGE = Source("IEC 61140", "from memory")
CHARGE_PERCEPTION = Value(0.5e-6, "C", _CHARGE)
CHARGE_PAIN = Value(50e-6, "C", _CHARGE)

STANDING_SHARE = Value(0.30, "", Source("BS 7671", "seen", "531.3.2(ii)", 2018))
STANDING_SHARE_OLDER = Value(1 / 3, "", Source("older rule", "common practice"))
LEAKAGE_SUMMATION = Value(
    0.75, "", Source("design factor for the vector sum of leakages", "common practice"), 0.7, 0.8
)
ADDITIONAL_PROTECTION_CURRENT = Value(30e-3, "A", Source("BS 7671", "seen", "415.1.1", 2018))
ADDITIONAL_PROTECTION_TIME = Value(
    40e-3, "s", Source("BS 7671", "seen", "415.1.1, at five times the rated current", 2018)
)
REINFORCED_EARTH_CURRENT = Value(10e-3, "A", Source("IEC 60364-5-54", "from memory", "543.7"))

_PROTECTIVE = Source("IEC 61140", "seen", "protective conductor current")


def protective_conductor_limit(*, rated_current: float, permanent: bool = False) -> Value:
    """Most that one equipment may send down its protective conductor, RMS [A].

    Parameters
    ----------
    rated_current : of the equipment [A], above 0; to 32 A when on a plug
    permanent : wired permanently, or on a plug above 32 A

    Plug: 2 mA to 4 A, then 0.5 mA/A, 5 mA above 10 A. Permanent: 3.5 mA to 7 A, then
    0.5 mA/A, 10 mA above 20 A. Raises `Refused`. Source: IEC 61140.

    >>> protective_conductor_limit(rated_current=6.0).likely
    0.003
    """
    if not 0 < rated_current < float("inf"):
        raise Refused("rated current", "must be above 0 A", given=f"{rated_current:g} A")
    if rated_current > 32 and not permanent:
        raise Refused("rated current", "must be at most 32 A on a plug",
                      given=f"{rated_current:g} A", hint="above it the permanent limit applies")
    least, most = (3.5e-3, 10e-3) if permanent else (2e-3, 5e-3)
    return Value(min(max(least, 0.5e-3 * rated_current), most), "A", _PROTECTIVE)
