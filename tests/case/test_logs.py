"""Current logs as loggers and spreadsheets write them."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.case.logs import read_log
from unlanded.errors import Refused


def read(folder, text, zone="UTC", encoding="utf-8"):
    path = folder / "log.csv"
    path.write_bytes(text.encode(encoding))
    return read_log(path, zone=zone)


def test_plain(tmp_path):
    log, said = read(tmp_path, "time,residual [mA]\n2026-03-09 10:00:00,6.5\n"
                               "2026-03-09 10:01:00,7.25\n")
    np.testing.assert_allclose(log.current, [6.5e-3, 7.25e-3], rtol=1e-12)
    assert np.diff(log.seconds).tolist() == [60.0]
    assert log.hours[0] == 10.0
    assert (said.rows, said.bad_rows, said.repeated, said.disordered) == (2, 0, 0, 0)


@pytest.mark.parametrize(("unit", "scale"), [("A", 1.0), ("mA", 1e-3), ("µA", 1e-6), ("uA", 1e-6)])
def test_units_in_the_heading(tmp_path, unit, scale):
    log, _ = read(tmp_path, f"time,I ({unit})\n2026-03-09 10:00,2\n2026-03-09 10:01,3\n")
    np.testing.assert_allclose(log.current, [2 * scale, 3 * scale], rtol=1e-12)


def test_decimal_commas_semicolons_and_a_byte_order_mark(tmp_path):
    log, _ = read(tmp_path, "time;residual [mA]\n2026-03-09T10:00;6,5\n2026-03-09T10:01;7,25\n",
                  encoding="utf-8-sig")
    np.testing.assert_allclose(log.current, [6.5e-3, 7.25e-3], rtol=1e-12)


def test_overflow_marks_are_infinite(tmp_path):
    rows = "".join(f"2026-03-09 10:0{k},{mark}\n"
                   for k, mark in enumerate(["OL", "over", "> 60", "inf", "5"]))
    log, said = read(tmp_path, f"time,residual [mA]\n{rows}")
    assert [math.isinf(i) for i in log.current] == [True] * 4 + [False]
    assert said.bad_rows == 0


def test_bad_rows_are_counted_and_named_and_never_dropped_in_silence(tmp_path):
    log, said = read(tmp_path, "time,residual [mA]\n2026-03-09 10:00,5\nyesterday,5\n"
                               "2026-03-09 10:02,abc\n2026-03-09 10:03,\n2026-03-09 10:04,6\n")
    assert len(log.current) == 2
    assert said.bad_rows == 3
    assert [str(m) for m in said.bad] == [
        'log.csv row 3, column "time": is not a time; given yesterday.',
        'log.csv row 4, column "residual [mA]": is not a number; given abc.',
        'log.csv row 5, column "residual [mA]": is not a number; given "".']


@pytest.mark.parametrize("stamp", ["9999-01-01 00:00", "1969-12-31 23:59", "0001-01-01 00:00"])
def test_a_time_that_nobody_believes_is_a_bad_row(tmp_path, stamp):
    log, said = read(tmp_path, f"time,residual [mA]\n2026-03-09 10:00,5\n{stamp},6\n"
                               "2026-03-09 10:01,7\n")
    assert said.bad_rows == 1
    assert np.diff(log.seconds).tolist() == [60.0]


def test_repeated_and_late_stamps(tmp_path):
    log, said = read(tmp_path, "time,residual [mA]\n2026-03-09 10:02,3\n2026-03-09 10:00,1\n"
                               "2026-03-09 10:02,9\n2026-03-09 10:01,2\n")
    np.testing.assert_allclose(log.current, [1e-3, 2e-3, 3e-3], rtol=1e-12)
    assert (said.repeated, said.disordered) == (1, 2)


def test_offsets_and_zones(tmp_path):
    text = "time,residual [mA]\n2026-07-09T10:00:00+02:00,5\n2026-07-09T08:30:00Z,6\n"
    log, _ = read(tmp_path, text, zone="Europe/London")
    assert np.diff(log.seconds).tolist() == [1800.0]
    assert log.hours.tolist() == [9.0, 9.5]  # the site's clock, an hour before the logger's
    local, _ = read(tmp_path, "time,residual [mA]\n2026-07-09 09:00,5\n2026-07-09 09:30,6\n",
                    zone="Europe/London")
    assert local.seconds.tolist() == log.seconds.tolist()


def test_the_hour_that_a_clock_skips_is_a_bad_row(tmp_path):
    # Clocks in London went from 01:00 to 02:00 on 29 March 2026.
    log, said = read(tmp_path, "time,residual [mA]\n2026-03-29 00:59,5\n2026-03-29 01:30,6\n"
                               "2026-03-29 02:00,7\n", zone="Europe/London")
    assert said.bad_rows == 1
    assert np.diff(log.seconds).tolist() == [60.0]


@pytest.mark.parametrize(
    ("text", "zone", "message"),
    [("time,x\n2026-03-09 10:00,5\n", "UTC", "has no column of currents"),
     ("when,residual [mA]\n2026-03-09 10:00,5\n", "UTC", "has no column of times"),
     ("time,residual [mA]\n2026-03-09 10:00,5\n", None, "row 2: its time says no offset"),
     ("time,residual [mA]\n2026-03-09 10:00,5\n", "Mars/Base", "is not a time zone"),
     ("time,residual [mA]\n2026-03-09 10:00,5\n", "UTC", "at least two samples"),
     ("", "UTC", "is empty")],
)
def test_refusals(tmp_path, text, zone, message):
    with pytest.raises(Refused, match=message):
        read(tmp_path, text, zone)
