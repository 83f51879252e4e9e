"""What a finding says, how sure, and the words that it must not use."""

from __future__ import annotations

import math
import re

import pytest

from example_causes import OMEGA, reduced, run, seen
from unlanded.study.causes import Explanation, explain
from unlanded.study.finding import Finding, danger, finding, findings, headline, sentences
from unlanded.study.reduced import Reduced

WELL = (("digital-10M", "124.1 V"), ("low-impedance", "0.4 V"))
SETS = (
    WELL, (("digital-10M", "229.8 V"), ("low-impedance", "228.9 V")),
    (("digital-10M", "21.3 V"), ("low-impedance", "0.4 V")),
    (("digital-10M", "1.23 V"), ("low-impedance", "1.2 V")),
    (("digital-10M", "60.0 V"), ("low-impedance", "60.1 V")), (),
)


def made(*readings: tuple[str, str], on: Reduced | None = None) -> tuple[Explanation, Finding]:
    found = explain(on or reduced(), [seen(tool, text) for tool, text in readings])
    return found, finding(found, "spare")


@pytest.mark.parametrize("readings", SETS, ids=str)
def test_no_finding_calls_a_conductor_dead_or_safe(readings: tuple[tuple[str, str], ...]) -> None:
    found, one = made(*readings)
    text = " ".join(sentences(found, one))
    assert not re.search(r"\b(dead|safe|safely|harmless)\b", text)
    assert "live until it is proved otherwise" in text
    assert "nan" not in text


def test_a_capacitive_finding_says_what_it_leaves_open() -> None:
    found, one = made(*WELL)
    assert one.claim.decided
    text = headline(found, one)
    assert re.search(r"what capacitive coupling on this run predicts \(odds (over )?\d+ to 1 over "
                     r"leakage below 1 MΩ\); leakage above \S+ [kM]Ω cannot be excluded by these "
                     r"instruments; over 99 % sure that it is this or such a leakage\.$", text)
    assert one.leak_odds > 10
    assert 100e3 < one.claim.leak_limit < 10e6


def test_the_leak_that_is_left_open_is_one_that_hardly_changes_the_reading() -> None:
    # Beside 3.5 nF, 0.91 MΩ at 50 Hz, R to earth takes |1 + X/(jR)| off: at the limit, little
    # enough for 15 % of either capacitance to make up for.
    _, one = made(*WELL)
    reactance = 1 / (OMEGA * 3.5e-9)
    assert math.hypot(1, reactance / one.claim.leak_limit) < 1.6


def test_causes_that_cannot_be_told_apart_are_both_named() -> None:
    found, one = made(("digital-10M", "229.8 V"), ("low-impedance", "228.9 V"))
    assert one.share < 0.9
    assert {one.cause, one.second} == {"solid connection", "back-feed through a load"}
    assert re.search(r"point to solid connection \(\d\d %\) without ruling out back-feed through a "
                     r"load \(\d\d %\): both can produce them, .*; one of these, over 99 % sure",
                     headline(found, one))


def test_causes_of_like_share_are_told_from_neither_side() -> None:
    found, one = made(("digital-10M", "226.0 V"), ("low-impedance", "17.1 V"))
    assert re.search(r"cannot tell leakage to a live neighbour \(\d\d %\) from back-feed through a "
                     r"load \(\d\d %\): .*; one of these, 9\d % sure", headline(found, one))


def test_a_finding_that_one_reading_carries_says_which() -> None:
    found, one = made(("digital-10M", "1.23 V"), ("low-impedance", "1.2 V"))
    assert one.claim.rests_on == (0,)
    assert not one.claim.decided
    assert headline(found, one).endswith(
        "% sure as worded, but reading 1 alone carries that: take it again.")


def test_many_open_causes_are_all_named() -> None:
    found, one = made(("digital-10M", "30.2 V"), ("low-impedance", "5.3 V"))
    assert len(one.claim.causes) > 2
    text = headline(found, one)
    assert "leave open none of these" in text
    assert all(c in text for c in one.claim.causes)
    assert "one of these" in text


def test_a_leak_is_named_with_its_size() -> None:
    found, one = made(("digital-10M", "21.3 V"), ("low-impedance", "0.4 V"),
                      ("digital-10M", "21.4 V"))
    assert re.search(r"point to leakage to earth of \d+ kΩ to \d+ kΩ", headline(found, one))


def test_what_fits_nothing_is_said() -> None:
    found, one = made(*WELL, ("moving-coil", "120 V"), ("digital-10M", "12.4 V"))
    assert one.misfits == (3,)
    assert any(s.startswith("Reading 4 (12.4 V") for s in sentences(found, one))


def test_the_coupled_current_is_that_of_the_coupling() -> None:
    _, one = made(*WELL)
    low, middle, high = one.current
    assert middle == pytest.approx(230 * OMEGA * 2e-9, rel=0.1, abs=0)  # 145 µA
    assert low < 230 * OMEGA * 2e-9 < high
    assert not one.felt


@pytest.mark.parametrize(("length", "words"), [
    (50.0, "below the 500 µA that is felt"), (400.0, "that is felt and makes one start"),
    (3000.0, "may not let go"),
])
def test_long_runs_are_said_to_hurt(length: float, words: str) -> None:
    # 2.9 µA for each metre: IEC 60479-1 has 0.5 mA felt, from 173 m, and 5 mA let go, from 1.7 km.
    base = run(length=length)
    found, one = made(on=Reduced(base, base, base, ("spare",)))
    text = danger(found, one)
    assert words in text
    assert "IEC 60479-1" in text
    if one.felt:
        assert "cannot hurt" not in text


def test_lengths_are_in_feet_where_asked() -> None:
    found, one = made()
    assert " ft of this run" in danger(found, one, customary=True)


def test_a_claim_without_leakages_says_none() -> None:
    shares = dict.fromkeys(("leakage to a live neighbour", "leakage to earth"), 0.0)
    found = explain(reduced(), [seen("two-pole", "not lit")], shares=shares)
    text = headline(found, finding(found, "spare"))
    assert "one of these, " in text
    assert "leakage" not in text


def test_findings_are_of_every_suspect() -> None:
    found, _ = made()
    assert [f.suspect for f in findings(found)] == ["spare"]
