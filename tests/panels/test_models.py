"""Models hold no widget, and say what the kit says."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from unlanded.case.build import build_run
from unlanded.case.loading import load_case
from unlanded.case.standing import case_margin
from unlanded.errors import Refused
from unlanded.panels import quantity
from unlanded.panels.causes_model import CausesModel
from unlanded.panels.desk import Desk
from unlanded.panels.margin_model import MarginModel
from unlanded.panels.memo_model import MemoModel
from unlanded.panels.operation_model import OperationModel
from unlanded.panels.readings_model import ReadingModel
from unlanded.panels.run_model import EARTHED, NOTHING, PIPE, SCREEN, SURFACE, RunModel
from unlanded.physics.burden import Burden
from unlanded.report.investigation import investigate
from unlanded.study.readings import Pair
from unlanded.units import show, si

MODELS = sorted(p.stem for p in Path(quantity.__file__).parent.glob("*_model.py"))


def test_models_import_no_widget() -> None:
    names = ", ".join(f"unlanded.panels.{m}" for m in (*MODELS, "desk", "work", "quantity"))
    code = f"import sys, {names}; print([m for m in ('ipywidgets', 'bqplot') if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert len(MODELS) == 6
    assert done.stdout.strip() == "[]"


@pytest.fixture
def quay(sites: Path) -> Desk:
    return Desk(sites / "tern-quay.toml")


@pytest.fixture
def pump(sites: Path) -> Desk:
    return Desk(sites / "larkmoor.toml")


class TestRun:
    """Question 1."""

    def test_length_typed_is_the_run_s(self, quay: Desk) -> None:
        model = RunModel(quay)
        model.set_length("170 m")
        model.read_case()
        assert model.run.residual == build_run(quay.case).residual
        assert model.run.length == 170.0
        assert "170 m" in model.answer()

    def test_matrix_is_that_of_the_case(self, quay: Desk) -> None:
        model = RunModel(quay)
        shown = [[float(c.replace("−", "-")) for c in row[1:]] for row in model.matrix().rows]
        assert_allclose(shown, 1e12 * build_run(load_case(quay.path)).matrix, rtol=0, atol=0.0051)

    def test_customary_matrix_is_per_foot(self, sites: Path) -> None:
        desk = Desk(sites / "alder-mill.toml")
        model = RunModel(desk)
        first = float(model.matrix().rows[0][1])
        assert first == pytest.approx(0.3048e12 * model.run.matrix[0, 0], rel=1e-3, abs=0)
        assert "pF/ft" in model.text()

    @pytest.mark.parametrize("name", [
        "tern-quay", "alder-mill", "heron-house", "larkmoor", "chalk-hill"])
    def test_every_step_of_the_spacing_is_a_section_that_can_be(
        self, sites: Path, name: str
    ) -> None:
        model = RunModel(Desk(sites / f"{name}.toml"))
        if model.surround == NOTHING:
            model.set_surround(SURFACE)
            model.read_case()
        spacing = model.spacing
        assert spacing is not None
        grid = spacing.quantity.grid(customary=model.desk.customary)
        for value in (grid[0], grid[len(grid) // 2], grid[-1]):
            model.set_spacing(quantity.written(value, "m", customary=model.desk.customary))
            model.read_case()
            assert model.spacing is not None
            assert model.spacing.value == pytest.approx(value, rel=1e-5, abs=0)

    @pytest.mark.parametrize("surround", [SURFACE, PIPE, SCREEN])
    def test_surround_comes_and_goes(self, quay: Desk, surround: str) -> None:
        model = RunModel(quay)
        assert model.spacing is None
        with pytest.raises(Refused, match="spacing: is fixed"):
            model.set_spacing("5 mm")
        for choice in (surround, NOTHING):
            model.set_surround(choice)
            model.read_case()
            assert model.surround == choice
            assert (model.run.section.surround is None) == (choice == NOTHING)

    def test_screen_is_earthed_where_it_is_chosen(self, sites: Path) -> None:
        site = sites / "chalk-hill.toml"
        site.write_text(site.read_text(encoding="utf-8").partition("[[readings]]")[0],
                        encoding="utf-8")
        model = RunModel(Desk(site))
        assert model.earthed == "no end"
        assert abs(model.run.voltage("screen@far")) > 10.0
        for choice, key in EARTHED.items():
            model.set_earthed(choice)
            model.read_case()
            assert model.earthed == choice
            assert f'earthed = "{key}"' in model.desk.case.text
        model.set_earthed("both ends")
        model.read_case()
        assert model.run.node("screen@far") == model.run.node("earth")

    def test_screen_that_has_a_reading_is_not_earthed(self, sites: Path) -> None:
        model = RunModel(Desk(sites / "chalk-hill.toml"))
        with pytest.raises(Refused, match="readings"):
            model.set_earthed("the near end")
        assert model.earthed == "no end"

    def test_a_cable_without_a_screen_has_none_to_earth(self, quay: Desk) -> None:
        model = RunModel(quay)
        assert model.earthed is None
        with pytest.raises(Refused):
            model.set_earthed("no end")

    def test_answer_where_every_conductor_is_held(self, quay: Desk) -> None:
        model = RunModel(quay)
        quay.change({"run.ends.near.black": "earth"})
        model.read_case()
        assert model.answer().endswith("no conductor is left without a feed.")


class TestReadings:
    """Question 2."""

    def test_table_is_the_run_with_the_meter_connected(self, quay: Desk) -> None:
        model = ReadingModel(quay)
        model.set_length("150 ft")
        model.read_case()
        model.set_resistance("3.3 Mohm")
        run = build_run(quay.case)
        loaded = abs(run.connect(Burden(3.3e6), "black@far").voltage)
        name, reads, *_ = model.table().rows[-1]
        assert (name, reads) == ("your meter, 3.3 MΩ", f"{loaded:.1f} V")

    def test_bands_are_those_of_the_memo(self, quay: Desk) -> None:
        model = ReadingModel(quay)
        assert {row[2] for row in model.table().rows} == {"…"}
        model.bands()
        ours = {row[0]: row[2:4] for row in model.table().rows}
        pair = Pair("black@far")
        for row in investigate(quay.case).sheet.rows:
            if row.pair == pair and row.instrument.threshold is None:
                # Both are drawn to within 1 % and rounded to the display's last digit.
                theirs = (row.low.text, row.high.text)
                for a, b in zip(ours[row.instrument.name], theirs, strict=True):
                    assert abs(si(a, "V") - si(b, "V")) <= 0.01 * si(b, "V") + 0.1

    def test_curve_against_length_passes_through_the_reading(self, quay: Desk) -> None:
        model = ReadingModel(quay)
        figure = model.length()
        assert figure.references[0].value == 85.0
        meter = show(abs(model.sheet.rows[-1].voltage), "V")
        assert figure.numbers[0].endswith(meter)

    def test_pair_of_the_first_reading_comes_first(self, quay: Desk) -> None:
        assert ReadingModel(quay).pair == Pair("black@far", "earth")

    @pytest.mark.parametrize("text", ["0 ohm", "-5 kohm", "10 m", "10"])
    def test_refuses_what_is_no_meter(self, quay: Desk, text: str) -> None:
        model = ReadingModel(quay)
        with pytest.raises(Refused):
            model.set_resistance(text)
        assert model.resistance == 10e6

    def test_pair_that_the_next_case_has_not_is_left(self, quay: Desk, sites: Path) -> None:
        model = ReadingModel(quay)
        quay.open(sites / "larkmoor.toml")
        model.read_case()
        assert model.pair == Pair("2@near", "N")


class TestCauses:
    """Question 3."""

    def test_reading_added_changed_and_taken_out(self, quay: Desk) -> None:
        model = CausesModel(quay)
        model.add_reading(instrument="two-pole", from_="black@far", to="earth", shows="lit",
                          after=[], resistor="")
        model.set_reading(0, "shows", "50.0 V")
        model.set_reading(1, "after", ["neighbours off"])
        assert [r.shows for r in quay.case.content.readings] == ["50.0 V", "0.9 V", "lit"]
        assert quay.case.content.readings[1].after == ("neighbours off",)
        model.take_reading(2)
        assert len(quay.case.content.readings) == 2
        quay.save()
        assert 'note = "same minute, same probes"' in quay.path.read_text(encoding="utf-8")

    def test_refused_readings(self, quay: Desk) -> None:
        model = CausesModel(quay)
        with pytest.raises(Refused, match="shows: is empty"):
            model.add_reading(instrument="two-pole", from_="black@far", to="earth", shows="")
        with pytest.raises(Refused, match=r"readings\[1\]\.shows"):
            model.set_reading(0, "shows", "lit")
        assert quay.case.content.readings[0].shows == "107.9 V"

    def test_a_real_source_is_told_from_coupling(self, quay: Desk) -> None:
        model = CausesModel(quay)
        assert model.odds_table().rows[0][1] == "capacitive coupling"
        model.set_reading(0, "shows", "229.8 V")
        model.set_reading(1, "shows", "228.9 V")
        model.read_case()
        assert model.odds_table().rows[0][1] == "solid connection"

    def test_work_is_told_and_stopped(self, quay: Desk) -> None:
        class Stop(Exception):
            pass

        def stop(_: float) -> None:
            raise Stop

        model = CausesModel(quay)
        shares: list[float] = []
        with pytest.raises(Stop):
            model.work_out(stop)
        model.work_out(shares.append)
        assert shares == sorted(shares)
        assert 0 <= shares[0] < shares[-1] < 1

    def test_tried_size_and_its_limits(self, quay: Desk) -> None:
        model = CausesModel(quay)
        model.set_size("10 kohm")
        assert "reading 1 would hardly be what it was" in model.tried_words()
        model.set_size("10 Mohm")
        assert model.tried_words().endswith("every reading could be what it was.")
        with pytest.raises(Refused, match="size: must be 1 kΩ to 10 MΩ"):
            model.set_size("11 Mohm")
        model.try_cause("magnetic pick-up")
        assert model.size_box.unit == "V"
        ((_, entry),) = model.offers()
        assert quay.add_to_memo(entry)

    def test_case_without_a_free_conductor(self, quay: Desk) -> None:
        model = CausesModel(quay)
        quay.change({"run.ends.near.black": "earth", "readings": None})
        with pytest.raises(Refused, match="no conductor that nothing feeds"):
            model.read_case()


class TestMargin:
    """Question 4."""

    @pytest.fixture
    def model(self, sites: Path) -> MarginModel:
        return MarginModel(Desk(sites / "heron-house.toml"))

    def test_margin_is_that_of_the_case(self, model: MarginModel) -> None:
        runs = [build_run(model.desk.case, limit) for limit in ("likely", "low", "high")]
        found = case_margin(model.desk.case, *runs)  # type: ignore[arg-type]
        assert model.margin.expected == found.expected
        assert model.margin.chance == found.chance

    def test_pieces_are_the_case_s_count(self, model: MarginModel) -> None:
        before = model.margin.expected
        assert (model.leak, model.pieces) == ("desk computers with screens", 6)
        model.set_pieces("9")
        model.read_case()
        assert model.desk.case.content.standing[0].count == 9
        assert model.margin.expected > before
        with pytest.raises(Refused, match="Pieces of it: must be a whole number"):
            model.set_pieces("2.5")

    def test_instrument_s_own_part_is_ohm_s_law(self, model: MarginModel) -> None:
        assert model.pair == Pair("brown@near", "earth")
        adds = {row[0]: row[1] for row in model.trip_table().rows}
        assert adds["two-pole tester, 200 kΩ"] == show(230 / 200e3, "A")

    def test_log_is_drawn(self, model: MarginModel) -> None:
        drawn = model.log()
        assert drawn is not None
        assert drawn.key == "log"

    def test_case_without_a_device(self, model: MarginModel, sites: Path) -> None:
        model.desk.open(sites / "larkmoor.toml")
        with pytest.raises(Refused, match="has no residual-current device"):
            model.read_case()


class TestOperation:
    """Question 5."""

    def test_answer_is_the_run_s_own_voltage(self, pump: Desk) -> None:
        model = OperationModel(pump)
        volts = abs(build_run(pump.case).voltage("2@near", "N"))
        assert f"{show(volts, 'V')} is coupled into the interlock relay" in model.answer()

    def test_judged_once_and_again_after_a_change(self, pump: Desk) -> None:
        model = OperationModel(pump)
        assert model.states() is None
        first = model.judge()
        assert model.judge() is first
        model.set_length("100 m")
        model.read_case()
        assert model.judged is None
        assert model.judge().found.state == "will drop out"

    def test_resistor_and_its_limits(self, pump: Desk) -> None:
        model = OperationModel(pump)
        model.set_resistor("33 kohm")
        assert model.beside().numbers[0].startswith("33 kΩ: ")
        with pytest.raises(Refused, match="must be 1 kΩ to 10 MΩ"):
            model.set_resistor("100 ohm")
        ((_, entry),) = model.offers()
        assert pump.add_to_memo(entry)

    def test_other_arrangements_where_the_case_names_its_own(self, sites: Path, pump: Desk) -> None:
        model = OperationModel(Desk(sites / "chalk-hill.toml"))
        assert model.others() is None
        model.judge()
        table = model.others()
        assert table is not None
        states = {row[0].split("\n")[0]: row[2] for row in table.rows}
        assert states["two-way, 1 live (as it is)"] == "may glow"
        assert states["contact at supply"] == "stays dark"
        plain = OperationModel(pump)
        plain.judge()
        assert plain.others() is None

    def test_case_that_watches_no_load(self, quay: Desk) -> None:
        with pytest.raises(Refused, match="watches no load"):
            OperationModel(quay)


class TestMemo:
    """Question 6."""

    def test_parts_left_out_are_in_the_case(self, quay: Desk) -> None:
        model = MemoModel(quay)
        assert all(model.chapters.values())
        model.choose("margin", False)
        model.choose("annex", False)
        model.read_case()
        assert quay.case.content.memo.leave_out == ("margin", "annex")
        assert "Residual-current margin" not in model.text().splitlines()[0]
        model.choose("margin", True)
        model.choose("annex", True)
        assert quay.case.content.memo.leave_out == ()

    def test_who_signs(self, quay: Desk) -> None:
        import datetime

        model = MemoModel(quay)
        model.sign("prepared_by", "A. Engineer")
        model.read_case()
        memo = model.contents(date=datetime.date(2026, 1, 2)).memo
        assert memo.prepared_by == "A. Engineer"
        model.sign("prepared_by", " ")
        assert quay.case.content.memo.prepared_by == ""

    def test_what_was_added_is_listed_in_words(self, quay: Desk) -> None:
        quay.add_to_memo({"kind": "loading", "from": "black@far", "to": "earth",
                          "meter": "3.3 Mohm"})
        quay.add_to_memo({"kind": "formulas"})
        model = MemoModel(quay)
        assert model.added == ("Reading against impedance, black to earth, far end, meter 3.3 MΩ",
                               "Formulas near to the section")

    def test_pages_and_folder(self, quay: Desk, tmp_path: Path) -> None:
        import datetime

        quay.change({"memo.leave_out": ["expected", "causes", "margin", "annex"]})
        model = MemoModel(quay)
        contents = model.contents(date=datetime.date(2026, 1, 2))
        shares: list[float] = []
        pages = model.pages(contents, shares.append)
        assert shares == sorted(shares)
        assert all(page.startswith(b"\x89PNG") for page in pages)
        model.write("out", contents, overwrite=False)
        assert (tmp_path / "out" / "memo.docx").exists()
        with pytest.raises(Refused, match="is there already"):
            model.write("out", contents, overwrite=False)
        with pytest.raises(Refused, match="folder: needs a name"):
            model.write(" ", contents, overwrite=False)
