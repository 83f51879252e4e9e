"""A lamp behind a weak source against the charge pump's formula and a stiff integrator."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from unlanded.physics.lamp import rectified_current

OMEGA = 2 * np.pi * 50


@pytest.mark.parametrize("level", [0.0, 10.0, 60.0, 140.0])
def test_a_capacitive_source_is_a_charge_pump(level: float) -> None:
    # Each half cycle moves 2 C (√2 V − V₀): circuit theory of rectifiers.
    c = 22e-9
    found = rectified_current(voltage=100.0, impedance=1 / (1j * OMEGA * c), frequency=50.0,
                              conducts_from=level)
    assert found[0] == pytest.approx(4 * 50 * c * (np.sqrt(2) * 100 - level), rel=1e-9, abs=0)


def test_below_its_voltage_a_lamp_takes_nothing() -> None:
    found = rectified_current(voltage=[30.0, 40.0], impedance=-1e5j, frequency=50.0,
                              conducts_from=50.0)
    assert found[0] == 0.0  # crest 42.4 V
    assert found[1] > 0.0  # crest 56.6 V


@pytest.mark.parametrize(("c", "g", "level", "within"), [
    (50e-9, 1 / 150e3, 70.0, 2e-3),
    (2e-9, 1 / 150e3, 140.0, 1e-3),  # ωC a tenth of G
])
def test_a_source_with_a_bleeder_against_a_stiff_integrator(
    c: float, g: float, level: float, within: float
) -> None:
    # C dv/dt = C dv_s/dt + G (v_s − v) − i(v), the lamp a steep diode at ±V₀ (scipy, Radau).
    volts = 120.0

    def lamp(v: float) -> float:
        return float(np.sign(v) * max(abs(v) - level, 0.0) * 0.1)

    def slope(t: float, v: np.ndarray) -> list[float]:
        source = np.sqrt(2) * volts * np.sin(OMEGA * t)
        rise = np.sqrt(2) * volts * OMEGA * np.cos(OMEGA * t)
        return [rise + (g * (source - v[0]) - lamp(v[0])) / c]

    times = np.linspace(0.06, 0.08, 4001)
    solved = solve_ivp(slope, (0.0, 0.08), [0.0], method="Radau", t_eval=times, rtol=1e-7,
                       atol=1e-9, max_step=2e-5)
    current = np.array([abs(lamp(v)) for v in solved.y[0]])
    mean = np.trapezoid(current, times) / 0.02
    found = rectified_current(voltage=volts, impedance=1 / (g + 1j * OMEGA * c), frequency=50.0,
                              conducts_from=level)
    assert found[0] == pytest.approx(mean, rel=within, abs=0)


@pytest.mark.parametrize("level", [0.0, 60.0, 200.0, 325.0, 326.0])
def test_a_resistive_source_drives_what_its_half_waves_have_above_the_level(level: float) -> None:
    # The mean of (√2 V |sin θ| − V₀) / R where that is above 0, summed over a quarter cycle.
    angle = (np.arange(400_000) + 0.5) * np.pi / 800_000
    above = np.maximum(np.sqrt(2) * 230 * np.sin(angle) - level, 0.0).mean()
    # A source with next to no capacitance is one too, found by steps over the cycle.
    for capacitance, within in ((0.0, 1e-6), (1.1e-3 / OMEGA / 500, 1e-3)):
        found = rectified_current(voltage=230.0, impedance=1 / (1 / 500 + 1j * OMEGA * capacitance),
                                  frequency=50.0, conducts_from=level)
        if level < 325:
            assert found[0] == pytest.approx(above / 500, rel=within, abs=0)
        elif level > np.sqrt(2) * 230:
            assert found[0] == 0


def test_a_resistive_source_of_no_voltage_lights_nothing() -> None:
    found = rectified_current(voltage=0.0, impedance=500.0, frequency=50.0, conducts_from=0.0)
    assert found[0] == 0


def test_broadcasts_over_cases() -> None:
    z = 1 / (1j * OMEGA * np.array([1e-9, 2e-9, 4e-9]))
    found = rectified_current(voltage=100.0, impedance=z, frequency=50.0, conducts_from=50.0)
    np.testing.assert_allclose(found / found[0], [1, 2, 4], rtol=1e-9)
