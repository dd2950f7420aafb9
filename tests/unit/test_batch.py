"""A table of readings, answered row by row: each row as the one-shot command answers it, or refused in a sentence."""

from __future__ import annotations

import csv
import io
import json
import os
import re
import signal
import stat
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from gaugeside import answering
from gaugeside.cli import main
from gaugeside.files import Lines
from gaugeside.logbook import Logbook
from reference.tables import rows as table_rows
from terminal.harness import clean_environ
from unit.hostile import HOSTILE, is_sentence, obeyed
from unit.ordinary_user import as_ordinary_user, reachable


class Batch:
    """One run over a table: status, what was written and what was told."""

    def __init__(self, status: int, out: str, err: str) -> None:
        self.status, self.out, self.err = status, out, err
        assert "Traceback" not in err

    @property
    def rows(self) -> list[dict[str, str]]:
        delimiter = next((one for one in "\t;" if one in self.out.partition("\n")[0]), ",")
        return list(csv.DictReader(io.StringIO(self.out), delimiter=delimiter, strict=True))

    @property
    def objects(self) -> list[dict[str, Any]]:
        return [json.loads(line) for line in self.out.splitlines()]


Run = Callable[..., Batch]


@pytest.fixture
def run(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> Run:
    def run_it(words: str, table: str | bytes, *more: str) -> Batch:
        path = tmp_path / "readings.csv"
        path.write_bytes(table if isinstance(table, bytes) else table.encode())
        capfd.readouterr()
        status = main(["batch", *words.split(), str(path), *more])
        return Batch(status, *capfd.readouterr())

    return run_it


# Against values from outside, and against the one-shot command


def test_saturation_of_published_pressures(run: Run) -> None:
    """Sources stand in the table of published values; it carries them to about 0.3 %."""
    known = [row for row in table_rows("saturation.csv") if row["refrigerant"] == "R-134a" and row["curve"] == "sat"]
    known = [row for row in known if "memory" not in row["source"]]
    assert len(known) >= 6
    table = "T_C,temperature [°C]\n" + "".join(f"{row['T_C']},{row['T_C']}\n" for row in known)
    found = run("saturation R-134a", table, "--json").objects
    for row, answer in zip(known, found, strict=True):
        assert answer["findings"]["dew_pressure"]["value"] == pytest.approx(float(row["p_kPa_abs"]) * 1e3, rel=5e-3)
    back = run("saturation R-134a", "pressure [kPa abs]\n" + "".join(f"{row['p_kPa_abs']}\n" for row in known))
    for row, cells in zip(known, back.rows, strict=True):
        assert float(cells["dew temperature [°C]"]) == pytest.approx(float(row["T_C"]), abs=0.15)


ONE_BY_ONE = [
    ("saturation R-448A", ["reading"], [["12.4 bar g"], ["-8 C"], ["-8"], ["90 C"], ["x"]]),
    (
        "superheat R-448A",
        ["suction_pressure", "--suction-temperature", "liquid PRESSURE", "Liquid pipe"],
        [["2.6 bar g", "2 C", "14.1 bar g", "29 C"], ["38 psig", "28 F", "", ""], ["2,6", "2", "", "29"],
         ["", "5 C", "", ""], ["10 inHg vac", "-20 C", "", ""]],
    ),
    (
        "component R-134a",
        ["component", "inlet", "outlet", "mass flow", "heat"],
        [["condenser", "9.1 bar g, 68 C", "9.0 bar g, SC 4 K", "0.14 kg/s", ""],
         ["condenser", "9.1 bar g, 68 C", "9.0 bar g, SC 4 K", "", "28 kW"],
         ["expansion", "9.0 bar g, SC 4 K", "1.0 bar g", "", ""], ["boiler", "1 bar", "2 bar", "", ""]],
    ),
    (
        "machine R-134a",
        ["suction pressure", "suction pipe", "discharge pressure", "discharge pipe", "liquid pipe", "electrical power",
         "drive"],
        [["1.0 bar g", "0 C", "9.1 bar g", "68 C", "33 C", "8 kW", "hermetic"], ["1", "", "9.1", "", "", "", ""],
         ["9.1", "", "1", "", "", "", ""]],
    ),
    (
        "stream",
        ["medium", "inlet", "outlet", "flow", "flow measured at"],
        [["water", "12 C", "7 C", "3.2 L/s", "outlet"], ["propylene glycol 30 %", "-4", "-8", "2 m3/h", ""],
         ["beer", "1", "2", "3", ""]],
    ),
]  # fmt: skip


@pytest.mark.parametrize(("words", "names", "rows"), ONE_BY_ONE, ids=[words for words, _, _ in ONE_BY_ONE])
@pytest.mark.parametrize("more", [[], ["--altitude", "1600 m", "--units", "ip", "--datum", "ashrae"]])
def test_each_row_is_answered_as_the_one_shot_command_answers_it(
    words: str, names: list[str], rows: list[list[str]], more: list[str], run: Run, capfd: pytest.CaptureFixture[str]
) -> None:
    text = io.StringIO()
    csv.writer(text, lineterminator="\r\n").writerows([names, *rows])
    batch = run(words, text.getvalue(), *more, "--json")
    sheet = run(words, text.getvalue(), *more)
    assert len(batch.objects) == len(sheet.rows) == len(rows)
    refused = 0
    check, *refrigerant = words.split()
    options = {"liquid PRESSURE": "liquid_pressure", "Liquid pipe": "liquid_temperature", "suction pipe":
               "suction_temperature", "discharge pipe": "discharge_temperature", "liquid pipe": "liquid_temperature",
               "flow measured at": "flow_at"}  # fmt: skip
    for number, (row, found, cells) in enumerate(zip(rows, batch.objects, sheet.rows, strict=True), 2):
        given = [(options.get(name, name), text) for name, text in zip(names, row, strict=True) if text]
        first = [text for name, text in given if name in ("component", "medium")]
        last = [text for name, text in given if name == "reading"]
        optional = [
            f"--{name.removeprefix('--').replace('_', '-').replace(' ', '-')}={text}"
            for name, text in given
            if name not in ("component", "medium", "reading")
        ]
        status = main([check, *first, *refrigerant, *last, *optional, *more, "--json"])
        alone = json.loads(capfd.readouterr().out)
        assert found.pop("row") == number
        refused += status == 2
        assert found == alone
        if status == 2:
            assert cells["refused"].endswith(f"{alone['error']['message']} {alone['error']['hint']}".strip())
            continue
        assert cells["refused"] == ""
        shown = {name.partition(" [")[0].removesuffix(" found"): text for name, text in cells.items() if text}
        for name in alone["findings"]:
            assert name.replace("_", " ") in shown
        for caution in alone["cautions"]:
            assert caution in cells["cautions"]
    assert f"{len(rows)} rows: {len(rows) - refused} answered, {refused} refused." in sheet.err
    assert batch.status == sheet.status == (2 if refused else 0)


def test_the_sheet_says_the_units_of_its_findings(run: Run) -> None:
    table = "suction pressure [bar g],suction temperature [°C]\n2.6,2\n"
    (si,) = run("superheat R-134a", table).rows
    (ip,) = run("superheat R-134a", table, "--units", "ip").rows
    assert float(ip["superheat [°F]"]) == pytest.approx(1.8 * float(si["superheat [K]"]), abs=0.1)
    kelvin = float(si["saturated suction temperature [°C]"])
    assert float(ip["saturated suction temperature [°F]"]) == pytest.approx(1.8 * kelvin + 32, abs=0.15)
    (one,) = run("saturation R-134a", "reading\n0 °C\n").rows
    (other,) = run("saturation R-134a", "reading\n0 °C\n", "--units", "ip").rows
    # 1 bar is 14.5038 psi (NIST SP 811).
    there = float(other["dew pressure [psi abs]"])
    assert there == pytest.approx(14.5038 * float(one["dew pressure [bar abs]"]), abs=0.1)


# The header


@pytest.mark.parametrize(
    ("heading", "text", "pascal"),
    [
        ("suction pressure [psig]", "38", 101325 + 38 * 6894.757), ("suction pressure (psig)", "38", 101325 + 262000.8),
        ("Suction_Pressure[bar(a)]", "3", 3e5), ("suction pressure (bar (a)) ", "3", 3e5),
        ("SUCTION PRESSURE [inHg vac]", "10", 101325 - 33863.89),
        ("suction pressure [bar vac]", "0.3", 71325), ("suction pressure [inHg g]", "10", 101325 + 33863.89),
        ("suction pressure [psig]", "2 bar abs", 2e5), ("--suction-pressure [kPa]", "100", 201325),
        ("suction pressure", "2", 301325), ("suction pressure []", "2", 301325),
        ('"suction pipe [°C]";suction pressure', "5;2", 301325),
    ],
)  # fmt: skip
def test_a_number_alone_takes_the_unit_of_its_heading(heading: str, text: str, pascal: float, run: Run) -> None:
    (found,) = run("superheat R-134a", f"{heading}\n{text}\n", "--json").objects
    assert found["readings"]["suction_pressure"]["value"] == pytest.approx(pascal, rel=1e-6)


def test_what_a_number_alone_is_taken_for_is_said_once(run: Run, isolated: Path) -> None:
    table = "suction pressure;suction temperature;liquid pressure [bar];note\n2;5 C;9;a\n3;5 C;9;b\n3 psi;1 C;9;c\n"
    told = run("superheat R-134a", table).err.splitlines()
    assert told[0].startswith("Note: site 101.33 kPa abs, standard atmosphere at sea level; units SI")
    assert told.count("suction pressure: a number alone is read as bar g.") == 1
    assert told.count("liquid pressure [bar]: a number alone is read as bar g.") == 1
    assert told.count("Not read, only carried along: note.") == 1
    assert not [line for line in told if line.startswith("suction temperature:")]
    assert told[-1] == "3 rows: 3 answered, 0 refused."
    isolated.mkdir()
    (isolated / "settings.json").write_text('{"bare_pressure": "absolute", "dress": "ip"}')
    told = run("superheat R-134a", table, "--barometer", "90 kPa").err.splitlines()
    assert told[0].startswith("Note: site 90.00 kPa abs, barometer 90 kPa; units IP")
    assert "suction pressure: a number alone is read as psi abs." in told


def test_each_way_a_column_was_understood_is_told(run: Run) -> None:
    table = "suction pressure;liquid pressure [inHg vac]\n38 psi;10\n2 bar;5\n3 psi;2.6 bar\n3 bar g;3 bar\n2;\n"
    told = run("superheat R-134a", table).err.splitlines()
    assert [line for line in told if "pressure" in line.partition(":")[0]] == [
        "suction pressure: 38 psi is read as 38 psi g.",
        "suction pressure: 2 bar is read as 2 bar g.",
        "liquid pressure [inHg vac]: 2.6 bar is read as 2.6 bar g.",
        "suction pressure: a number alone is read as bar g.",
    ]


def test_the_part_of_a_state_whose_unit_the_heading_leaves_out_is_told(run: Run) -> None:
    words, outlet = "component condenser R-134a", '"9 bar g, SC 4"'
    table = f'inlet [psi g],outlet,heat\n"130, 65",{outlet},20 kW\n'
    told = run(words, table).err.splitlines()
    assert "inlet [psi g]: a temperature without a unit is read as °C." in told
    assert "outlet: a temperature difference without a unit is read as K." in told
    assert not [line for line in told if line.startswith("inlet") and "a pressure" in line]
    told = run(words, table.replace("[psi g]", "[°C]")).err.splitlines()
    assert "inlet [°C]: a pressure without a unit is read as bar g." in told
    assert not [line for line in told if line.startswith("inlet") and "a temperature" in line]


def test_a_state_takes_both_units_of_its_heading(run: Run) -> None:
    table = 'inlet [psig; °F],outlet,mass flow [lb/h]\n"130, 150","9 bar g, SC 4 K",1000\n'
    found = run("component condenser R-134a", table, "--json").objects[0]["readings"]
    assert found["inlet"]["values"]["pressure"]["value"] == pytest.approx(101325 + 130 * 6894.757, rel=1e-6)
    assert found["inlet"]["values"]["temperature"]["value"] == pytest.approx((150 + 459.67) / 1.8, rel=1e-9)
    assert found["mass_flow"]["value"] == pytest.approx(1000 * 0.45359237 / 3600, rel=1e-9)
    assert found["component"]["value"] == "condenser"


@pytest.mark.parametrize(("unit", "kelvin"), [("°F", 5), ("degR", 5), ("°C", 9), ("K", 9)])
def test_the_unit_of_a_temperature_is_that_of_its_differences_too(unit: str, kelvin: float, run: Run) -> None:
    table = f'inlet [psi g; {unit}],outlet,heat\n"130, SH 9","9 bar g, SC 4 K",20 kW\n'
    (found,) = run("component condenser R-134a", table, "--json").objects
    assert found["readings"]["inlet"]["values"]["superheat"]["value"] == pytest.approx(kelvin)


@pytest.mark.parametrize(
    ("words", "header", "told"),
    [
        ("superheat R-134a", "suction presure", "Name it suction_pressure if that is meant"),
        ("superheat R-134a", "suction pressure,suction temp", "suction temp' is no reading"),
        ("superheat R-134a", "suction pressure 2", "comes near one"),
        ("superheat R-134a", "suction pressure,Suction_Pressure [psig]", "are both the suction pressure"),
        ("superheat R-134a", "suction pipe,suction temperature", "are both the suction pipe"),
        ("superheat R-134a", "time,note", "names no reading of superheat"), ("superheat R-134a", "2;5", "no reading"),
        ("superheat R-134a", "suction pressure [brg]", "not a unit of pressure"),
        ("superheat R-134a", "suction pressure (m) [bar]", "more than one pair of brackets"),
        ("superheat R-134a", "suction pressure (k)[Pa]", "more than one pair of brackets"),
        ("superheat R-134a", "suction pressure (h [Pa])", "brackets in 'h [Pa]' belong to no unit"),
        ("superheat R-134a", "suction pressure [(m) bar]", "belong to no unit"),
        ("superheat R-134a", "suction pressure [m)(bar]", "brackets"),
        ("machine R-134a", "electrical power (M) [W]", "more than one pair of brackets"),
        ("component condenser R-134a", "heat (h) [W]", "more than one pair of brackets"),
        ("component condenser R-134a", "inlet [bar g; psi g],outlet", "gives two units of pressure"),
        ("component condenser R-134a", "inlet [°C; K],outlet", "gives two units of temperature"),
        ("superheat R-134a", "suction pressure [°C]", "takes a pressure"),
        ("superheat R-134a", "suction pressure [mPa]", "mPa"),
        ("superheat R-134a", "suction pressure [2 bar]", "is no unit"),
        ("superheat R-134a", "suction pressure [inHg]", "could be below or above the atmosphere"),
        ("superheat R-134a", "suction pressure,a;suction pressure", "parted at comma or semicolon"),
        ("superheat R-134a", 'suction pressure,"note', "quotes"), ("superheat R-134a", "suction pressure\x00", "NUL"),
        ("superheat R-134a", "suction pressure," * 1001, "more than 1000 columns"),
        ("superheat R-134a", "suction pressure," + "x" * 70_000, "longer than 60000"),
        ("component R-134a", "inlet,outlet,heat", "say it before the file"),
        ("component boiler R-134a", "inlet,outlet,heat", "is not a choice here"),
        ("component pump R-134a", "component,inlet", "said twice"),
        ("component condenser R-134a", "inlet [bar g, °C],outlet", "bracket stands alone"),
        ("component condenser R-134a", "component [kW],inlet", "said twice"),
        ("component R-134a", "component [kW],inlet", "takes no unit"),
        ("stream water", "inlet temperature,outlet", "comes near one"), ("stream", "inlet,outlet", "No column says"),
        ("saturation R-134a", "pressure,temperature", "are both the pressure or temp."),
        ("saturation R-4544", "reading", "Did you mean"), ("saturation R-401A", "reading", "No published mixing"),
        ("saturation", "reading", "required: FILE"),
    ],
)  # fmt: skip
def test_a_header_that_is_not_clear_is_refused_whole(words: str, header: str, told: str, run: Run) -> None:
    found = run(words, f"{header}\n2,3\n")
    assert (found.status, found.out) == (2, "")
    assert told in found.err
    assert is_sentence(found.err.splitlines()[-1])
    as_json = run(words, f"{header}\n2,3\n", "--json")
    assert as_json.status == 2
    assert told in "{message} {hint}".format(**as_json.objects[0]["error"])


@pytest.mark.parametrize("table", ["", "\n\r\n ", "\ufeff", " \r"])
def test_a_table_of_nothing_is_told(table: str, run: Run) -> None:
    found = run("superheat R-134a", table)
    assert (found.status, found.out) == (2, "")
    assert "The table is empty. Its first line names the columns." in found.err


@pytest.mark.parametrize("name", ["cautions", "notes", "refused"])
def test_the_last_columns_are_the_answer_s_own(name: str, run: Run, tmp_path: Path) -> None:
    found = run("superheat R-134a", f"suction pressure,{name}\n2,3\n", "--to", str(tmp_path / "new"))
    assert found.status == 2
    assert f"The answer has a column {name} of its own. Give yours another name." in found.err
    assert not (tmp_path / "new").exists()


def test_a_finding_that_was_a_reading_too_has_a_heading_of_its_own(run: Run) -> None:
    table = 'inlet,outlet,mass flow [kg/s]\n"9.1 bar g, 68 C","9.0 bar g, SC 4 K",0.140\n'
    (row,) = run("component condenser R-134a", table).rows
    assert (row["mass flow [kg/s]"], row["mass flow found [kg/s]"]) == ("0.140", "0.1400")


def test_what_is_no_reading_is_carried_along_as_it_is(run: Run) -> None:
    table = 'time,"remark, long",suction pressure,remark\n2026-03-14 09:30,"a ""b"", c",2,=1+1\n,,3,-5\n'
    rows = run("superheat R-134a", table).rows
    assert list(rows[0])[:5] == ["time", "remark, long", "suction pressure", "remark", "superheat [K]"]
    assert list(rows[0])[-3:] == ["cautions", "notes", "refused"]
    assert [row["remark, long"] for row in rows] == ['a "b", c', ""]
    assert [row["remark"] for row in rows] == ["'=1+1", "-5"]
    first = run("superheat R-134a", table, "--json").objects[0]
    assert first["carried"] == {"time": "2026-03-14 09:30", "remark, long": 'a "b", c', "remark": "=1+1"}


# Cells and rows


def test_decimal_commas_and_every_delimiter(run: Run) -> None:
    for delimiter in (";", "\t"):
        for end in ("\n", "\r\n", "\r"):
            table = end.join(["a;suction pressure;suction temperature", "1;2,6;5,5", ";;", "2;2.6 bar g;5,5 °C", ""])
            found = run("superheat R-134a", table.replace(";", delimiter), "--json").objects
            assert [row["row"] for row in found] == [2, 4]
            for row in found:
                assert row["readings"]["suction_pressure"]["value"] == pytest.approx(361325)
                assert row["readings"]["suction_temperature"]["value"] == pytest.approx(278.65)
            assert run("superheat R-134a", table.replace(";", delimiter)).out.count(delimiter) == 12 * 3
    # Where the comma parts the cells it is no decimal comma, and two cells too many never pass for one reading.
    for line in ("1,2,6,5.5", "2,6", "1,2,6,5,5"):
        found = run("superheat R-134a", f"a,suction pressure,suction temperature\n{line}\n1,2.6,5\n", "--json").objects
        assert "double quotes" in found[0]["error"]["hint"]
        assert "findings" in found[1]
    quoted = run("superheat R-134a", 'suction pressure,suction temperature\n"2,6","5,5"\n', "--json").objects[0]
    assert quoted["readings"]["suction_pressure"]["value"] == pytest.approx(361325)
    assert "1.234 or as 1234" in run("saturation R-134a", 'reading [kPa]\n"1,234"\n').rows[0]["refused"]


def test_a_short_row_leaves_the_last_readings_blank_where_no_comma_could_have_done_it(run: Run) -> None:
    (row,) = run("superheat R-134a", "suction pressure;suction temperature\n2,6\n", "--json").objects
    assert set(row["readings"]) == {"suction_pressure"}


def test_a_bad_row_stops_no_other_and_keeps_its_cells(run: Run) -> None:
    good = "time {n};2 bar g;5 C\n"
    bad = [
        "x;2 brg;5 C", "x;;5 C", "x;2 bar;5 C;more", 'x;"2 bar;5 C', "x;2\x00 bar;5 C", "x;\x1b[2J;5 C", "x;9e999;5 C",
        f"x;{'9' * 70_000};5 C", f"{'x' * 70_000};2 bar;5 C", "x;2 bar;\u202e5 C", "x;---;5 C", "x;#N/A;5 C",
    ]  # fmt: skip
    lines = "".join(good.format(n=n) + one + "\n" for n, one in enumerate(bad))
    found = run("superheat R-134a", "when;suction pressure;suction temperature\n" + lines)
    assert found.status == 2
    assert f"{2 * len(bad)} rows: {len(bad)} answered, {len(bad)} refused." in found.err
    assert not obeyed(found.out + found.err)
    assert [bool(row["refused"]) for row in found.rows] == [False, True] * len(bad)
    assert [row["when"] for row in found.rows][::2] == [f"time {n}" for n in range(len(bad))]
    assert found.rows[1]["suction pressure"] == "2 brg"
    for row in found.rows:
        assert not row["refused"] or is_sentence(row["refused"])
        assert bool(row["refused"]) != bool(row["superheat [K]"])


def test_a_column_s_kind_binds_its_cells(run: Run) -> None:
    rows = run("saturation R-134a", "temperature [°F]\n32\n0 °C\n3 bar\n").rows
    assert [row["dew pressure [bar abs]"] for row in rows] == ["2.93", "2.93", ""]
    assert "is no temperature, as its column" in rows[2]["refused"]
    told = run("saturation R-134a", "temperature\n5\n", "--units", "ip").err
    assert "temperature: a number alone is read as °F." in told


@pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE)
def test_hostile_cells_and_headings_are_harmless(text: str, run: Run) -> None:
    for encoding in ("utf-8", "utf-16"):
        cell = '"' + text.replace('"', '""') + '"'
        table = f"note,suction pressure,suction temperature\n{cell},{cell},5 C\n{cell},2 bar,5 C\n"
        found = run("superheat R-134a", table.encode(encoding, "replace"))
        assert not obeyed(found.out + found.err)
        assert "met a fault" not in found.out
        head = run("superheat R-134a", f"{cell},suction pressure\n,2\n".encode(encoding, "replace"))
        assert not obeyed(head.out + head.err)
        assert all(len(line) < 1500 for line in head.err.splitlines())
        assert head.status in (0, 2)


@pytest.mark.parametrize("text", ["=1+1", "+1+1", "-1+1", "@x", "-2+3+cmd|' /C calc'!A0", "＝1", "--", "-5*C"])
def test_no_text_of_a_table_becomes_a_formula(text: str, run: Run) -> None:
    found = run("superheat R-134a", f"{text},suction pressure\n{text},{text}\n{text},-0.3 bar g\n")
    cells = [one for row in csv.reader(io.StringIO(found.out)) for one in row]
    assert [one for one in cells if text in one][:3] == [f"'{text}"] * 3
    assert not [one for one in cells if one.startswith(tuple("=+@＝"))]
    assert [one for one in cells if one.startswith("-0.3")] == ["-0.3 bar g"]


# Encodings


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_degree_signs_in_every_encoding(encoding: str, run: Run) -> None:
    table = "Ort;suction pressure [bar g];suction temperature [°C]\nKühlhaus;2,6;5\nTür;2,6;41 °F\n"
    found = run("superheat R-134a", table.encode(encoding))
    assert [row["Ort"] for row in found.rows] == ["Kühlhaus", "Tür"]
    assert found.rows[0]["superheat [K]"] == found.rows[1]["superheat [K]"]
    assert ("read as Windows-1252" in found.err) == (encoding == "cp1252")


def test_bytes_that_are_no_text_refuse_their_row_alone(run: Run) -> None:
    # 0x81 is no character of Windows-1252.
    found = run("superheat R-134a", b"suction pressure,a\n2,\x81\n2,\xe4\n\xff,\n3,\n", "--json").objects
    assert ["error" in row for row in found] == [True, False, True, False]
    marked = run("superheat R-134a", b"\xef\xbb\xbfsuction pressure\n2\n2 \xb0\n", "--json").objects
    assert "no text" in marked[1]["error"]["message"]


@pytest.mark.parametrize("size", [1, 2, 3, 7, 65_536])
def test_lines_are_the_same_in_whatever_pieces_they_come(size: int) -> None:
    class Pieces(io.BytesIO):
        def read1(self, most: int | None = -1, /) -> bytes:
            return super().read(size)

    for encoding in ("utf-8", "utf-8-sig", "utf-16", "utf-16-be"):
        mark = b"\xfe\xff" if encoding == "utf-16-be" else b""
        text = "a°\r\nb\rc\n\nüber\r\r\n" + "x" * 20 + "\nend"
        found = list(Lines(Pieces(mark + text.encode(encoding)), "-", 19))
        told = [line if isinstance(line, str) else None for line in found]
        assert told == ["a°", "b", "c", "", "über", "", None, "end"], encoding


# Files and pipes


def test_into_a_file_for_its_owner_alone(run: Run, tmp_path: Path) -> None:
    target = tmp_path / "answers.csv"
    table = "suction pressure\n2\nx\n"
    printed = run("superheat R-134a", table)
    before = os.umask(0)
    try:
        found = run("superheat R-134a", table, "--to", str(target))
    finally:
        os.umask(before)
    assert (found.status, found.out) == (2, "")
    assert "2 rows: 1 answered, 1 refused." in found.err
    assert target.read_text(encoding="utf-8") == printed.out
    assert stat.S_IMODE(target.stat().st_mode) == 0o600
    assert "--replace" in run("superheat R-134a", table, "--to", str(target)).err
    assert run("superheat R-134a", "suction pressure\n2\n", "--to", str(target), "--replace").status == 0
    assert target.read_text(encoding="utf-8").count("\n") == 2
    # A table with a mark gets an answer with one, so that the same program opens it.
    run("superheat R-134a", b"\xef\xbb\xbfsuction pressure\n2\n", "--to", str(target), "--replace")
    assert target.read_bytes().startswith(b"\xef\xbb\xbfsuction pressure,superheat [K]")
    as_json = run("superheat R-134a", table, "--json", "--to", "-")
    assert len(as_json.objects) == 2


def test_nothing_else_is_written_over(run: Run, tmp_path: Path) -> None:
    mine = tmp_path / "mine"
    mine.write_text("mine")
    (tmp_path / "link").symlink_to(mine)
    (tmp_path / "folder").mkdir()
    os.mkfifo(tmp_path / "pipe")
    table = "suction pressure\n2\n"
    for name in ("link", "folder", "pipe", "mine/in", "no/where", "readings.csv"):
        found = run("superheat R-134a", table, "--to", str(tmp_path / name), "--replace")
        assert (found.status, found.out) == (2, "")
        assert is_sentence(found.err.splitlines()[-1])
    assert mine.read_text() == "mine"
    assert (tmp_path / "readings.csv").read_text() == table
    # Nor is anything left of an answer that could not begin.
    assert run("superheat R-134a", "note\n2\n", "--to", str(tmp_path / "new")).status == 2
    assert sorted(one.name for one in tmp_path.iterdir()) == ["folder", "link", "mine", "pipe", "readings.csv"]


def test_a_folder_that_takes_no_file(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    with reachable(tmp_path) as folder:
        table = folder / "readings.csv"
        table.write_text("suction pressure\n2\n")
        table.chmod(0o644)
        folder.chmod(0o555)
        main(["superheat", "R-134a", "--suction-pressure", "2"])
        with as_ordinary_user():
            assert main(["batch", "superheat", "R-134a", str(table), "--to", str(folder / "new")]) == 2
        assert "permission denied. Nothing was changed there" in capfd.readouterr().err


def test_what_is_no_file_is_not_waited_for(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    os.mkfifo(tmp_path / "pipe")
    (tmp_path / "zero").symlink_to("/dev/zero")
    for name in ("pipe", "zero", ".", "absent", "a\x00b"):
        assert main(["batch", "saturation", "R-134a", str(tmp_path / name)]) == 2
        assert is_sentence(capfd.readouterr().err.strip())
    real = tmp_path / "real"
    real.write_text("reading\n5 C\n")
    (tmp_path / "link").symlink_to(real)
    assert main(["batch", "saturation", "R-134a", str(tmp_path / "link")]) == 0


def process(home: Path, *words: str, **changes: str) -> subprocess.Popen[bytes]:
    return subprocess.Popen(
        [sys.executable, "-m", "gaugeside", "batch", *words], env={**clean_environ(home), **changes},
        stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE,
    )  # fmt: skip


@pytest.mark.parametrize("name", ["SIGTERM", "SIGHUP", "SIGINT"])
def test_a_program_that_is_ended_takes_its_half_answer_along(name: str, tmp_path: Path) -> None:
    folder = tmp_path / "answers"
    folder.mkdir()
    with process(tmp_path, "saturation", "R-134a", "-", "--to", str(folder / "new")) as running:
        assert running.stdin is not None
        running.stdin.write(b"reading\n5 C\n")
        running.stdin.flush()
        deadline = time.monotonic() + 20
        while not list(folder.iterdir()):
            assert time.monotonic() < deadline, "it never began to write"
            time.sleep(0.01)
        running.send_signal(getattr(signal, name))
        assert running.wait(20) == 128 + getattr(signal, name)
        assert list(folder.iterdir()) == []


def test_a_fault_of_the_program_refuses_its_row_alone(run: Run, monkeypatch: pytest.MonkeyPatch) -> None:
    def perform(asked: Any) -> Any:
        return sound(asked) if asked["values"]["reading"]["temperature"] > 280 else 1 // 0

    sound = answering.perform
    monkeypatch.setattr(answering, "perform", perform)
    first, second = run("saturation R-134a", "reading\n5 C\n10 C\n").rows
    assert first["refused"].startswith("The program met a fault on these readings (ZeroDivisionError).")
    assert second["refused"] == ""


def test_a_decimal_comma_is_written_where_it_is_asked_for(run: Run) -> None:
    for delimiter in ",;":
        table = f"reading{delimiter}note\n0 °C{delimiter}1.5\n"
        (row,) = run("saturation R-134a", table, "--decimal-comma").rows
        assert (row["dew pressure [bar abs]"], row["note"]) == ("2,93", "1.5")


def test_a_growing_table_is_answered_as_it_grows(tmp_path: Path) -> None:
    with process(tmp_path, "saturation", "R-134a", "-") as running:
        assert running.stdin is not None
        assert running.stdout is not None
        running.stdin.write(b"reading [\xc2\xb0C]\n0\n")
        running.stdin.flush()
        assert running.stdout.readline().startswith(b"reading [")
        assert running.stdout.readline().startswith(b"0,")
        running.stdin.write(b"5\n")
        running.stdin.close()
        assert running.stdout.readline().startswith(b"5,")
        assert running.wait(20) == 0


def test_memory_does_not_grow_with_the_table(tmp_path: Path) -> None:
    used = []
    for size in (10, 60):
        with process(tmp_path, "saturation", "R-134a", "-", "--json") as running:
            assert running.stdin is not None
            assert running.stdout is not None
            running.stdin.write(b"note,reading\n")
            # Lines too long, rows too wide, rows that are refused: a megabyte of each, again and again.
            for _ in range(size):
                running.stdin.write(b"x" * 500_000 + b"\n" + b"," * 55_000 + b"\n" + b"a,b\n" * 20)
                running.stdin.flush()
                for _ in range(21):
                    running.stdout.readline()
            found = re.search(r"VmHWM:\s+(\d+) kB", Path(f"/proc/{running.pid}/status").read_text())
            assert found is not None
            used.append(int(found[1]))
            running.stdin.close()
            running.stdout.read()
    assert used[1] < used[0] + 5_000, used


def test_a_poor_locale_gets_ascii_and_a_reader_that_left_is_no_fault(tmp_path: Path) -> None:
    (tmp_path / "t.csv").write_text("suction pressure\tOrt\n2 bar\tKühlhaus\n")
    words = ("superheat", "R-134a", str(tmp_path / "t.csv"))
    with process(tmp_path, *words, LC_ALL="C") as running:
        out, err = running.communicate()
    assert out.isascii()
    assert err.isascii()
    assert b"suction pressure\tOrt\tsuperheat [K]\t" in out
    reader, writer = os.pipe()
    os.close(reader)
    with os.fdopen(writer, "wb") as gone:
        done = subprocess.run(
            [sys.executable, "-m", "gaugeside", "batch", *words], env=clean_environ(tmp_path), stdout=gone,
            stderr=subprocess.PIPE, check=False,
        )  # fmt: skip
    assert done.returncode == 0
    assert b"Traceback" not in done.stderr


def test_a_full_disk_leaves_nothing_of_the_answer(tmp_path: Path) -> None:
    table, target = tmp_path / "t.csv", tmp_path / "answers.csv"
    table.write_text("suction pressure\n" + "2 bar\n" * 300)
    code = (
        "import resource, sys; resource.setrlimit(resource.RLIMIT_FSIZE, (4000, 4000));"
        "from gaugeside.cli import main; sys.exit(main())"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, "batch", "superheat", "R-134a", str(table), "--to", str(target)],
        env=clean_environ(tmp_path), capture_output=True, check=False,
    )  # fmt: skip
    assert done.returncode == 2
    assert "cannot be written: file too large" in done.stderr.decode()
    assert sorted(one.name for one in tmp_path.iterdir()) == ["t.csv"]


def test_the_property_library_is_loaded_once_and_no_other_process_started(tmp_path: Path) -> None:
    code = """
import sys
seen = []
sys.addaudithook(lambda event, arguments: seen.append(
    arguments[0] if event == "import" else event
) if event in ("import", "subprocess.Popen", "os.fork", "os.posix_spawn", "os.exec") else None)
from gaugeside.cli import main
status = main()
print(status, seen.count("CoolProp.CoolProp"), [one for one in seen if one in ("subprocess.Popen", "os.fork")])
"""
    told = []
    for rows in (1, 20):
        (tmp_path / "t.csv").write_text("reading\n" + "".join(f"{n} C\n" for n in range(rows)))
        done = subprocess.run(
            [sys.executable, "-c", code, "batch", "saturation", "R-134a", str(tmp_path / "t.csv")],
            env=clean_environ(tmp_path), capture_output=True, check=False,
        )  # fmt: skip
        assert done.stdout.count(b"\n") == rows + 2
        told.append(done.stdout.decode().splitlines()[-1])
    assert told[0] == told[1]
    assert re.fullmatch(r"0 [12] \[\]", told[0]), "the interpreter tells of one loading once or twice"


def test_a_stage_below_may_be_named_in_a_row(run: Run, isolated: Path) -> None:
    words = ["--suction-pressure", "1.0 bar g", "--suction-temperature", "0 C", "--discharge-pressure", "9.1 bar g",
             "--discharge-temperature", "68 C", "--liquid-temperature", "33 C", "--electrical-power", "8 kW",
             "--drive", "hermetic"]  # fmt: skip
    assert main(["machine", "R-134a", *words, "--keep"]) == 0
    table = (
        "suction pressure,suction pipe,discharge pressure,discharge pipe,liquid pipe,electrical power,drive,"
        "stage below\n1,0,9.1,68,33,8 kW,hermetic,1\n1,0,9.1,68,33,8 kW,hermetic,2\n"
    )
    first, second = run("machine R-134a", table).rows
    assert float(first["overall power [kW]"]) > 8
    assert second["refused"] == (
        "stage below: There is no entry 2 in the logbook. The list shows the numbers there are."
    )
    assert Logbook(isolated / "logbook.sqlite3").count() == 1, "a batch keeps nothing"


@pytest.mark.parametrize("text", ["1e-400 bar abs", "0.1e-330 bar g", "-1e-999 kPa"])
def test_a_number_too_small_to_hold_is_no_zero(text: str, run: Run) -> None:
    (row,) = run("superheat R-134a", f"suction pressure\n{text}\n").rows
    assert "is too small a number. Check the digits." in row["refused"]


def test_the_cells_of_a_row_without_a_column_are_named(run: Run) -> None:
    header = "suction pressure;suction temperature\n"
    (row,) = run("superheat R-134a", f"{header}2 bar;5 C;cold room; door open;{'x' * 90}\n").rows
    assert "This row has 5 cells, the header 2; without a column: 'cold room', 'door open', 'xxx" in row["refused"]
    assert "x" * 33 not in row["refused"]
    (row,) = run("superheat R-134a", f"{header}2 bar;5 C{';y' * 500}\n").rows
    assert row["refused"].count("'y'") == 10
    assert "and 490 more" in row["refused"]
    assert "refused" not in run("superheat R-134a", f"{header}2 bar;5 C;;\n").rows[0]["refused"]


def test_a_decimal_comma_that_is_read_is_told_of_once(run: Run) -> None:
    told = "Numbers are written with a point; --decimal-comma writes commas."
    header = "suction pressure;suction temperature\n"
    for delimiter in (";", "\t"):
        table = f"{header}2,6;5,5\n2,7 bar g;5\n".replace(";", delimiter)
        found = run("superheat R-134a", table)
        assert found.err.count(told) == 1
        assert "," not in found.rows[0]["superheat [K]"]
        assert told not in run("superheat R-134a", table, "--decimal-comma").err
        # JSON has points alone, and no choice.
        assert told not in run("superheat R-134a", table, "--json").err
    assert told not in run("superheat R-134a", f"{header}2.6;5.5\n").err
    assert told not in run("superheat R-134a", 'suction pressure,suction temperature\n"2,6","5,5"\n').err
    # No decimal comma, but the comma between the parts of a state.
    table = "component;inlet;outlet\ncondenser;9.1 bar g, 68 C;SC 4 K\n"
    assert told not in run("component R-134a", table).err


def test_the_name_of_a_file_may_begin_like_a_number(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "-7.csv").write_text("reading\n0 °C\n", encoding="utf-8")
    (tmp_path / " -7.csv").write_text("not this one")
    assert main(["batch", "saturation", "R-134a", "-7.csv", "--to", "-8.csv"]) == 0
    assert main(["logbook", "export", "--to", "-9.json", "--logbook", "-5.sqlite3"]) == 0
    assert main(["logbook", "import", "-9.json"]) == 0
    assert capfd.readouterr().out.startswith("0 entries taken")
    assert {path.name for path in tmp_path.iterdir()} >= {"-7.csv", "-8.csv", "-9.json"}
    assert not list(tmp_path.glob(" -[89]*"))


def test_nothing_is_done_where_the_answer_has_nowhere_to_go(tmp_path: Path) -> None:
    (tmp_path / "t.csv").write_text("reading\n0 C\n")
    closed = ["sh", "-c", 'exec "$0" -m gaugeside "$@" >&-', sys.executable]
    keep = ["superheat", "R-134a", "--suction-pressure", "2 bar g", "--keep"]
    for words in (["batch", "saturation", "R-134a", str(tmp_path / "t.csv")], keep):
        done = subprocess.run([*closed, *words], env=clean_environ(tmp_path), stderr=subprocess.PIPE, check=False)
        assert done.returncode == 1
        assert done.stderr.startswith(b"Standard output is closed, so nothing was done.")
    assert [path.name for path in tmp_path.iterdir()] == ["t.csv"]
    into = ["batch", "saturation", "R-134a", str(tmp_path / "t.csv"), "--to", str(tmp_path / "new.csv")]
    assert subprocess.run([*closed, *into], env=clean_environ(tmp_path), check=False).returncode == 0
    assert (tmp_path / "new.csv").read_text().count("\n") == 2


def test_a_cell_in_quotes_goes_on_over_the_ends_of_lines(run: Run) -> None:
    table = 'note,suction pressure,suction temperature\n"first\n7,2,9\nlast ""x""",2.6,5\nb,2.6,5\n"c\n",x,5\n,3,5\n'
    for end in ("\n", "\r\n", "\r"):
        found = run("superheat R-134a", table.replace("\n", end), "--json").objects
        assert [row["row"] for row in found] == [2, 5, 6, 8]
        assert ["error" in row for row in found] == [False, False, True, False]
        assert found[0]["carried"] == {"note": 'first 7,2,9 last "x"'}
        assert found[0]["readings"] == found[1]["readings"]
    assert [row["note"] for row in run("superheat R-134a", table).rows] == ['first 7,2,9 last "x"', "b", "c ", ""]
    refused = run("superheat R-134a", 'note,suction pressure\na,"2\n bar"\n').rows[0]["refused"]
    assert "control character (U+000A)" in refused


@pytest.mark.parametrize(
    "behind", ["", "b,3\n" * 3, "b,3\n" * 200, 'b,3\nc,"3"\n', "b,3\n" + "x" * 70_000 + "\n", "b,3\n\x00\n"]
)
def test_a_quote_that_is_not_closed_refuses_its_line_alone(behind: str, run: Run) -> None:
    whole, odd = run("superheat R-134a", f"note,suction pressure\n{behind}", "--json").objects, '"a,2\n'
    first, *found = run("superheat R-134a", f"note,suction pressure\n{odd}{behind}", "--json").objects
    assert "quotes in this line do not fit" in first["error"]["message"]
    assert [{**row, "row": row["row"] - 1} for row in found] == whole


def test_decimal_commas_that_fit_by_chance_are_refused_or_told(run: Run) -> None:
    head, told = "suction pressure,suction temperature", "In a comma table 2,6 is two cells;"
    for header, row in [
        (f"{head},note,tag", "2,6,8,0,,"), (f"{head},note,tag", "2,6,8,0,"), (head, "2.6,5,"), (f"{head},,", "2,6,8,0"),
    ]:  # fmt: skip
        (found,) = run("superheat R-134a", f"{header}\n{row}\n").rows
        assert "double quotes" in found["refused"]
        assert found["superheat [K]"] == ""
    for header, row in [(f"{head},,", "2.6,5,,"), (f"{head},", "2.6,5,said beside"), (head, '"2,6","5,0"')]:
        found = run("superheat R-134a", f"{header}\n{row}\n")
        assert (found.status, told in found.err) == (0, False)
    for delimiter in ",;":
        found = run("superheat R-134a", f"{head},note,tag\n2,6,8,0\n3,7,8,0\n".replace(",", delimiter))
        assert (found.status, found.err.count(told)) == (0, delimiter == ",")


@pytest.mark.parametrize("text", ["2.600", "12.345 bar g", "2.600 bar"])
def test_a_point_among_decimal_commas_is_refused(text: str, run: Run) -> None:
    table = f"suction pressure;suction temperature\n{text};5.5\n3;5,5\n{text};5.5\n2.6;5\n"
    rows = run("superheat R-134a", table).rows
    assert [bool(row["refused"]) for row in rows] == [False, False, True, False]
    assert rows[2]["refused"].startswith("suction pressure: In a table with decimal commas")
    assert [bool(row["refused"]) for row in run("superheat R-134a", table, "--decimal-comma").rows] == [
        True, False, True, False,
    ]  # fmt: skip
    # A comma that groups thousands is none; three digits behind a nought are no thousand.
    table = 'suction pressure [Pa];note\n"1,234,567.5";\n300.125;\n"1.234.567,5";x\n0.125 bar;\n300.125;\n'
    assert [bool(row["refused"]) for row in run("superheat R-134a", table).rows] == [False, False, False, False, True]


OWN = ["logbook.sqlite3", "logbook.sqlite3-journal", "settings.json", "draft.json", "other.sqlite3",
       "other.sqlite3-journal", "in/../logbook.sqlite3"]  # fmt: skip


@pytest.mark.parametrize("name", OWN)
@pytest.mark.parametrize("words", [["batch", "saturation", "R-134a", "FILE"], ["logbook", "export", "--csv"]])
def test_no_file_of_the_program_is_replaced(
    words: list[str], name: str, isolated: Path, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "t.csv").write_text("reading\n0 C\n")
    (isolated / "in").mkdir(parents=True)
    for one in ("logbook.sqlite3", "other.sqlite3"):
        assert main(["superheat", "R-134a", "--suction-pressure", "2", "--keep", "--logbook", str(isolated / one)]) == 0
    for one in ("settings.json", "draft.json"):
        (isolated / one).write_text("{}")
    before = {path.name: path.read_bytes() for path in isolated.iterdir() if path.is_file()}
    words = [str(tmp_path / "t.csv") if word == "FILE" else word for word in words]
    capfd.readouterr()
    for more in ([], ["--replace"]):
        logbook = ["--logbook", str(isolated / "other.sqlite3")]
        assert main([*words, "--to", str(isolated / name), *logbook, *more]) == 2
        out, err = capfd.readouterr()
        assert (out, err.splitlines()[-1][:13]) == ("", "That file is ")
    assert {path.name: path.read_bytes() for path in isolated.iterdir() if path.is_file()} == before


def test_the_home_folder_may_be_a_tilde(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("HOME", str(tmp_path))
    (tmp_path / "t.csv").write_text("reading\n0 C\n")
    assert main(["batch", "saturation", "R-134a", "~/t.csv", "--to", "~/new.csv"]) == 0
    assert main(["logbook", "export", "--to", "~/log.json"]) == 0
    assert main(["logbook", "import", "~/log.json"]) == 0
    assert (tmp_path / "new.csv").exists()
    assert main(["batch", "saturation", "R-134a", "~/t.csv", "--to", "~/t.csv", "--replace"]) == 2
    assert "would replace the readings it comes from" in capfd.readouterr().err


def test_columns_of_one_name_are_told_apart(run: Run) -> None:
    (found,) = run("saturation R-134a", "note,reading,note,,note (2),note,\na,0 C,b,c,d,e,f\n", "--json").objects
    assert found["carried"] == {
        "note": "a",
        "note (2)": "b",
        "": "c",
        "note (2) (2)": "d",
        "note (3)": "e",
        " (2)": "f",
    }


def test_a_row_that_could_not_be_read_says_which_it_is(run: Run) -> None:
    table = "reading;note\n0 C;a\n" + "x" * 70_000 + '\n1 C;\x00\n\n1 C;"b\nbad;c\n'
    rows = run("saturation R-134a", table).rows
    assert [row["refused"].partition(":")[0] for row in rows] == ["", "row 3", "row 4", "row 6", "reading"]


@pytest.mark.parametrize(
    ("text", "written"),
    [
        ("x;=1+1", "x;'=1+1"), ("x, =1+1", "x, '=1+1"), ('x;"=1+1', "x;\"'=1+1"), ("x|@x", "x|'@x"),
        ("x;-2+3+cmd|' /C calc'!A0", "x;'-2+3+cmd|' /C calc'!A0"), ("a;+A1;＝1,-A1", "a;'+A1;'＝1,'-A1"),
        ("x;'=1", "x;'=1"), ("warm; -5 °C, +3 K", "warm; -5 °C, +3 K"), ("a-b; c=d", "a-b; c=d"),
        ("-10 C, sat vapour", "-10 C, sat vapour"), ("-0.3 bar g, SC 4 K", "-0.3 bar g, SC 4 K"),
        ("-5 C, x0.3", "-5 C, x0.3"), ("-5 K superheat", "-5 K superheat"), ("-5 C, A1", "'-5 C, A1"),
        ("-x", "'-x"), ("-5, -A1", "'-5, '-A1"),
    ],
)  # fmt: skip
def test_no_part_of_a_cell_becomes_a_formula_under_another_delimiter(text: str, written: str, run: Run) -> None:
    quoted = '"' + text.replace('"', '""') + '"'
    (row,) = run("saturation R-134a", f"reading,note\n0 C,{quoted}\n").rows
    assert row["note"] == written


@pytest.mark.parametrize("text", ["-1 x " * 30, "- 1 a" * 30, "-5 " + "barr " * 30])
def test_no_cell_that_is_only_carried_along_is_searched_for_a_meaning(
    text: str, run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    def search(*words: object, **more: object) -> list[str]:
        raise AssertionError("a search through all units for every cell of a wide table takes seconds a row")

    table = f"note,reading [°C]\n{text},0\n"
    assert run("saturation R-134a", table).status == 0
    monkeypatch.setattr("gaugeside.quantities.reading.difflib", SimpleNamespace(get_close_matches=search))
    (row,) = run("saturation R-134a", table).rows
    assert row["note"] == f"'{text}"
