"""A cause tried by hand: against the whole network with the leak in it, and its limits."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from case_text import site
from unlanded.case.loading import read_case
from unlanded.case.observed import case_observations, case_suspects
from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.tried import SIZED, Trial, fits, tried_figure
from unlanded.study.ends import Through
from unlanded.study.reduced import Reduced


@pytest.fixture(scope="module")
def mill() -> Investigation:
    return investigate(read_case(site("alder-mill")))


def trial(found: Investigation, cause: str, suspect: str = "white") -> Trial:
    suspects = case_suspects(found.case.content, found.run)
    return Trial(Reduced(*found.runs, suspects), case_observations(found.case), suspect,
                 cause)  # type: ignore[arg-type]


@pytest.mark.parametrize("ohms", [3e3, 100e3, 2e6])
def test_leak_to_earth_is_the_network_with_that_resistor(mill: Investigation, ohms: float) -> None:
    made = trial(mill, "leakage to earth")
    leak = Through(Burden(ohms), "earth", "leak")
    leaky = replace(mill.run, far={**mill.run.far, "white": leak}, capacitance=mill.run.matrix)
    wanted = [abs(leaky.connect(r.burden, r.pair.a, r.pair.b).voltage) for r in made.readings]
    assert_allclose(made.volts_at(ohms), wanted, rtol=2e-3)


def test_a_leak_to_earth_lowers_every_reading_on_it_and_only_so_far(mill: Investigation) -> None:
    made = trial(mill, "leakage to earth")
    sizes, volts = made.curves
    on_it = [k for k, r in enumerate(made.readings) if r.pair.a == "white@far"]
    assert np.all(np.diff(volts[on_it], axis=1) > 0)
    assert_allclose([sizes[0], sizes[-1]], [1e3, 10e6], rtol=1e-12)
    low, high = made.bands
    assert np.all(low < high)
    assert np.mean((low <= volts) & (volts <= high)) > 0.99


def test_what_fits_and_what_does_not(mill: Investigation) -> None:
    made = trial(mill, "leakage to earth")
    assert fits(made, 10e6)[1]  # the reading on the other conductor
    assert not fits(made, 3e3)[0]


@pytest.mark.parametrize("cause", SIZED)
def test_figure_of_every_cause_that_has_a_size(mill: Investigation, cause: str) -> None:
    made = trial(mill, cause)
    drawn = tried_figure(made, made.sizes.likely)
    assert len(drawn.lines) == len(drawn.bands) == 3
    assert drawn.x.unit == ("V" if cause == "magnetic pick-up" else "Ω")
    assert drawn.numbers[0].startswith("78.6 V, digital meter, 10 MΩ, white to earth")


@pytest.mark.parametrize(("cause", "suspect", "says"), [
    ("solid connection", "white", "cause: has no size to try"),
    ("leakage to earth", "black", "conductor: is not one that a cause is looked for on"),
])
def test_refuses_what_cannot_be_tried(
    mill: Investigation, cause: str, suspect: str, says: str
) -> None:
    with pytest.raises(Refused, match=says):
        trial(mill, cause, suspect)


@pytest.mark.parametrize("size", [999.0, 10.1e6, float("nan")])
def test_refuses_a_size_out_of_range(mill: Investigation, size: float) -> None:
    with pytest.raises(Refused, match="size: must be 1 kΩ to 10 MΩ"):
        trial(mill, "leakage to earth").volts_at(size)
