"""The one-shot commands, run in this process: every command line, its JSON, its exit status, what it writes."""

from __future__ import annotations

import json
import shlex
from pathlib import Path
from typing import Any

import pytest

from gaugeside import __version__, cli
from gaugeside.options import EXAMPLES
from gaugeside.quantities import Kind, standard_atmosphere

SUPERHEAT = [
    "superheat", "R-448A", "--suction-pressure", "2.6 bar g", "--suction-temperature", "2 C",
    "--liquid-pressure", "14.1 bar g", "--liquid-temperature", "29 C",
]  # fmt: skip
MORE = [
    "--discharge-pressure", "14.6 bar g", "--discharge-temperature", "75 C", "--suction-pressure-drop", "0.1 bar",
    "--liquid-pressure-drop", "0.2 bar",
]  # fmt: skip
CONDENSER = ["component", "condenser", "R-134a", "--inlet", "9.1 bar g, 68 C", "--outlet", "9.0 bar g, SC 4 K"]
CHECKS = [
    (["saturation", "R-448A", "12.4 bar g"], {"bubble_temperature", "dew_temperature", "glide", "latent_heat"}),
    (["saturation", "R-448A", "-8 C"], {"bubble_pressure", "dew_pressure", "mean_temperature", "liquid_density"}),
    (SUPERHEAT, {"superheat", "subcooling", "saturated_suction_temperature"}),
    (SUPERHEAT + MORE, {"discharge_superheat", "saturated_discharge_temperature", "pressure_ratio"}),
    ([*CONDENSER, "--mass-flow", "0.14 kg/s"], {"heat_rejected", "inlet_enthalpy", "outlet_temperature"}),
    ([*CONDENSER, "--heat", "28 kW"], {"mass_flow", "outlet_region", "inlet_region"}),
    (
        ["component", "evaporator", "R-454C", "--inlet", "2 bar g, x 0.3", "--outlet", "-2 C", "--heat", "12 kW"],
        {"heat_absorbed", "mass_flow", "inlet_vapour_fraction"},
    ),
    (
        [
            "component", "compressor", "R-134a", "--inlet", "2 bar g, SH 8 K", "--outlet", "9 bar g, 60 C",
            "--power", "9 kW",
        ],
        {"power_to_refrigerant", "mass_flow", "isentropic_efficiency"},
    ),
    (
        ["component", "expansion", "R-134a", "--inlet", "9 bar g, SC 5 K", "--outlet", "2 bar g"],
        {"outlet_temperature", "outlet_vapour_fraction", "outlet_enthalpy"},
    ),
]  # fmt: skip

SITE = {"site_pressure_from": "barometer", "site_pressure_text": "83 kPa", "bare_pressure": "absolute"}


class Run:
    """One run of the command line: its status and what it wrote."""

    def __init__(self, capsys: pytest.CaptureFixture[str], *words: str) -> None:
        self.status = cli.main(words)
        self.out, self.err = capsys.readouterr()

    @property
    def json(self) -> Any:
        assert self.err == ""
        assert self.out.endswith("\n")
        assert self.out.count("\n") == 1
        return json.loads(self.out, parse_constant=lambda word: pytest.fail(f"{word} is not JSON"))


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str]) -> Any:
    return lambda *words: Run(capsys, *words)


@pytest.mark.parametrize(("words", "names"), CHECKS)
def test_a_check_answers_as_json_of_si_values(run: Any, words: list[str], names: set[str], isolated: Path) -> None:
    found = run(*words, "--json")
    assert found.status == 0
    document = found.json
    assert {"check", "refrigerant", "readings", "findings", "notes", "cautions", "library_version"} <= set(document)
    assert document["check"] == words[0]
    assert document["refrigerant"] in words
    assert names <= set(document["findings"])
    for name, finding in document["findings"].items():
        assert set(finding) == {"value", "unit"}, name
        assert isinstance(finding["value"], str if name.endswith("_region") else float), name
    for reading in document["readings"].values():
        assert "typed" in reading
        assert ("value" in reading) != ("values" in reading)
    assert all(isinstance(note, str) for note in [*document["notes"], *document["cautions"]])
    assert not isolated.exists()


@pytest.mark.parametrize(("words", "names"), CHECKS)
def test_a_check_answers_as_a_sheet(run: Any, words: list[str], names: set[str], isolated: Path) -> None:
    found = run(*words)
    assert found.status == 0
    assert found.err == ""
    assert "Estimates from the readings typed; maker's figures and local rules come first." in found.out
    assert "standard atmosphere at sea level" in found.out
    for word in words[2:]:
        assert word.startswith("-") or word in found.out
    assert max(map(len, found.out.splitlines())) <= 110
    assert not isolated.exists()


def test_the_sheet_shows_what_the_json_holds(run: Any) -> None:
    document = run(*SUPERHEAT, "--json").json
    lines = {line[:23].strip(): line for line in run(*SUPERHEAT).out.splitlines()}
    superheat = document["findings"]["superheat"]["value"]
    assert f"{superheat:.1f} K" in lines["superheat"]
    assert f"{superheat * 1.8:.1f} °F" in lines["superheat"]
    assert "2.60 bar g" in lines["suction pressure"]
    assert "3.61 bar abs" in lines["suction pressure"]
    assert document["readings"]["suction_pressure"] == {"value": 361325.0, "unit": "Pa", "typed": "2.6 bar g"}
    assert document["readings"]["suction_temperature"] == {"value": 275.15, "unit": "K", "typed": "2 C"}


@pytest.mark.parametrize(
    ("words", "name", "value"),
    [
        (["saturation", "R-134a", "-8C"], "reading", 265.15),
        (["saturation", "R-134a", "-8 C"], "reading", 265.15),
        (["saturation", "R-134a", "−8 C"], "reading", 265.15),
        (["saturation", "R-134a", "-0.3 bar g"], "reading", 71325.0),
        (["saturation", "R-134a", "-.3barg"], "reading", 71325.0),
        (["superheat", "R-134a", "--suction-pressure", "-0.3 bar g"], "suction_pressure", 71325.0),
        (["superheat", "R-134a", "--suction-pressure=-0.3 bar g"], "suction_pressure", 71325.0),
    ],
)
def test_a_reading_may_start_with_a_minus_sign(run: Any, words: list[str], name: str, value: float) -> None:
    reading = run(*words, "--json").json["readings"][name]
    assert reading["value"] == pytest.approx(value, rel=1e-12)
    assert reading["typed"] == reading["typed"].strip()


def test_a_state_may_start_with_a_minus_sign(run: Any) -> None:
    words = ["component", "evaporator", "R-134a", "--inlet", "-10 C, x 0.3", "--outlet", "-10 C, sat vapour"]
    document = run(*words, "--heat", "10 kW", "--json").json
    assert document["readings"]["inlet"]["values"] == {
        "temperature": {"value": 263.15, "unit": "K"},
        "vapour_fraction": {"value": 0.3, "unit": "1"},
    }


@pytest.mark.parametrize(
    ("reading", "kind", "value", "unit"),
    [
        ("5 K", Kind.TEMPERATURE, 5.0, "K"), ("-8C", Kind.TEMPERATURE, 265.15, "K"),
        ("20 degrees C", Kind.TEMPERATURE, 293.15, "K"), ("500 rankine", Kind.TEMPERATURE, 500 / 1.8, "K"),
        ("5 dK", Kind.TEMPERATURE_DIFFERENCE, 5.0, "K"), ("30 inH2O", Kind.PRESSURE_DIFFERENCE, 30 * 249.08891, "Pa"),
        ("0.14 kg/s", Kind.MASS_FLOW, 0.14, "kg/s"), ("3.6 m3/h", Kind.VOLUME_FLOW, 0.001, "m3/s"),
        ("6 TR", Kind.POWER, 6 * 3516.85284207, "W"), ("100 Btu/lb", Kind.SPECIFIC_ENTHALPY, 232600.0, "J/kg"),
        ("1.7 kJ/(kg K)", Kind.SPECIFIC_ENTROPY, 1700.0, "J/(kg K)"), ("12 kg/m3", Kind.DENSITY, 12.0, "kg/m3"),
        ("25 %", Kind.FRACTION, 0.25, "1"), ("1000 ft", Kind.LENGTH, 304.8, "m"),
    ],
)  # fmt: skip
def test_convert_gives_the_si_value_of_each_kind(run: Any, reading: str, kind: Kind, value: float, unit: str) -> None:
    document = run("convert", reading, "--json").json
    name = kind.value.replace(" ", "_")
    assert set(document["findings"]) == {name}
    assert document["findings"][name] == {"value": pytest.approx(value, rel=1e-9), "unit": unit}
    sheet = run("convert", reading)
    assert sheet.status == 0
    assert sheet.out.startswith(f"{reading}   {kind.value}: ")


@pytest.mark.parametrize(
    ("words", "absolute", "gauge"),
    [
        (["12.4 bar g"], 1341325.0, 1.24e6), (["12.4 bar"], 1341325.0, 1.24e6), (["2 bar abs"], 2e5, 98675.0),
        (["10 inHg vac"], 101325 - 33863.88640341, -33863.88640341),
        (["-10 inHg", "--barometer", "83 kPa"], 83000 - 33863.88640341, -33863.88640341),
        (["1 bar g", "--altitude", "1600 m"], standard_atmosphere(1600) + 1e5, 1e5),
        (["1 bar g", "--altitude", "1000 ft", "--units", "ip"], standard_atmosphere(304.8) + 1e5, 1e5),
    ],
)  # fmt: skip
def test_convert_gives_a_pressure_absolute_and_gauge(run: Any, words: list[str], absolute: float, gauge: float) -> None:
    assert run("convert", *words, "--json").json["findings"] == {
        "absolute_pressure": {"value": pytest.approx(absolute, rel=1e-9), "unit": "Pa"},
        "gauge_pressure": {"value": pytest.approx(gauge, rel=1e-9), "unit": "Pa"},
    }


def test_convert_shows_every_unit_gauge_and_absolute(run: Any) -> None:
    lines = run("convert", "1 bar g").out.splitlines()
    for expected in ("  1.00 bar g", "  14.5 psi g", "  2.01 bar abs", "  29.2 psi abs", "  29.53 inHg g"):
        assert expected in lines
    assert not [line for line in lines if "vac" in line or "micron" in line]
    below = run("convert", "-10 inHg g").out.splitlines()
    # 1 inHg is 3386.389 Pa (NIST SP 811), 1 psi 6894.757 Pa.
    for expected in ("  10.00 inHg vac", "  4.9 psi vac", "  506000 micron"):
        assert expected in below
    assert "As a temperature difference it would be 10.0 K = 18.0 °F" in run("convert", "10 C").out


@pytest.mark.parametrize(
    ("words", "field", "message"),
    [
        (["saturation", "R-134a", "12 brg"], "reading", "not a unit of pressure"),
        (["saturation", "R-134a", "5 Celcius"], "reading", "Did you mean °C?"),
        (["saturation", "R-134a", "5 kg/s"], "reading", "takes a pressure or a temperature"),
        (["saturation", "R-134a", "-300 C"], "reading", "absolute zero"),
        (["saturation", "R-134a", "31 inHg vac"], "reading", "no pressure is left"),
        (["saturation", "R-134a", ""], "reading", "empty"),
        (["saturation", "R-134a", "9" * 10_000], "reading", "10000 characters"),
        (["saturation", "R-134a", "5 \u202eC"], "reading", "control character (U+202E)"),
        (["saturation", "R-134a", "1,234 kPa"], "reading", "1.234 or as 1234"),
        (["saturation", "R-4544", "5 C"], "refrigerant", "Did you mean R-454"),
        (["saturation", "", "5 C"], "refrigerant", "No refrigerant is named"),
        (["saturation", "R-401A", "5 C"], "refrigerant", "No published mixing model is available"),
        (["saturation", "R-744", "40 C"], "reading", "no saturation above its critical point"),
        (["saturation", "R-744", "5 C", "--datum", "nbp"], None, "does not exist for R-744"),
        (["superheat", "R-134a"], "suction_pressure", "No reading is typed"),
        (["superheat", "R-134a", "--suction-temperature", "5 C"], "suction_pressure", "no suction pressure beside it"),
        (["superheat", "R-134a", "--suction-pressure", ""], "suction_pressure", "given, but empty"),
        ([*CONDENSER], "mass_flow", "2 are blank"),
        ([*CONDENSER, "--mass-flow", "1 kg/s", "--heat", "5 kW"], "heat", "Nothing is left blank"),
        ([*CONDENSER, "--power", "5 kW"], "power", "takes no power"),
        (["component", "boiler", "R-134a"], "component", "is not a choice here"),
        (["convert", "12"], "reading", "has no unit"), (["convert", "12 xyz"], "reading", "not a unit"),
        (["convert", "12 bar", "--altitude", "20 km"], "altitude", "outside the standard atmosphere"),
        (["convert", "12 bar", "--altitude", ""], "altitude", "given, but empty"),
        (["convert", "12 bar", "--altitude", "2100"], "altitude", "Write 2100 m or 2100 ft."),
        (["convert", "12 bar", "--altitude", "2100", "--units", "ip"], "altitude", "may be in metres or in feet"),
        (["convert", "12 bar", "--barometer", "835"], "barometer", "mmHg or inHg. Type the unit too: 94.1 kPa"),
        (["convert", "12 bar", "--altitude", "5 bar"], "altitude", "takes a length"),
        (["convert", "12 bar", "--barometer", "3 bar"], "barometer", "is not an atmospheric pressure"),
        (["convert", "12 bar", "--barometer", "0 bar g"], "barometer", "a barometer is absolute"),
        (["convert", "12 bar", "--altitude", "5 m", "--barometer", "90 kPa"], None, "not allowed with"),
        (["saturation", "R-134a"], None, "required: reading"), (["nonsense"], None, "invalid choice: 'nonsense'"),
        (["saturation", "R-134a", "5 C", "--datum", "mine"], None, "invalid choice: 'mine'"),
        (["saturation", "R-134a", "5 C", "--unit", "ip"], None, "Unrecognized arguments"),
        (["saturation", "R-134a", "45", "c"], None, "needs quotes: '45 C'"),
        (["logbook", "show", "3"], None, "no entry 3"), (["refrigerants", "R-4544"], None, "Did you mean"),
    ],
)  # fmt: skip
def test_refused_input_ends_with_status_2_and_a_sentence(
    run: Any, words: list[str], field: str | None, message: str, isolated: Path
) -> None:
    as_json = run(*words, "--json")
    error = as_json.json["error"]
    assert as_json.status == 2
    assert set(error) == {"field", "message", "hint"}
    assert error["field"] == field
    assert message in f"{error['message']} {error['hint']}"
    assert error["hint"]
    as_text = run(*words)
    assert as_text.status == 2
    assert as_text.out == ""
    assert error["message"] in as_text.err
    assert as_text.err.count("\n") == 1
    if field:
        assert as_text.err.startswith(field.replace("_", " ") + ": ")
    assert not isolated.exists()


def test_superheat_at_altitude_moves_by_the_shift_of_the_dew_point(run: Any) -> None:
    def dew(pascal: float) -> float:
        document = run("saturation", "R-448A", f"{pascal} Pa abs", "--json").json
        return float(document["findings"]["dew_temperature"]["value"])

    low = run(*SUPERHEAT, "--json").json
    high = run(*SUPERHEAT, "--altitude", "1600 m", "--json").json
    shift = dew(2.6e5 + 101325) - dew(2.6e5 + high["site"]["atmosphere"]["value"])
    apart = high["findings"]["superheat"]["value"] - low["findings"]["superheat"]["value"]
    assert apart == pytest.approx(shift, abs=1e-6)
    assert high["site"]["source"] == "altitude 1600 m, standard atmosphere ISO 2533"


def test_units_dress_the_sheet_and_leave_the_json_in_si(run: Any) -> None:
    sheet = run(*SUPERHEAT, "--units", "ip").out
    assert "37.7 psi g" in sheet
    assert "35.6 °F" in sheet
    si, ip = (run(*SUPERHEAT, "--units", units, "--json").json for units in ("si", "ip"))
    assert si["findings"] == ip["findings"]
    assert "75.1 psi g" in run("saturation", "R-134a", "75.1 psi", "--units", "ip").out


@pytest.mark.parametrize(("datum", "enthalpy"), [("iir", 200e3), ("ashrae", None), ("nbp", None)])
def test_datum_is_stated_and_moves_the_enthalpies(run: Any, datum: str, enthalpy: float | None) -> None:
    document = run("saturation", "R-134a", "0 C", "--datum", datum, "--json").json
    assert document["datum"] == datum
    assert any(note.startswith("Enthalpies: ") for note in document["notes"])
    found = document["findings"]["liquid_enthalpy"]["value"]
    assert found == pytest.approx(enthalpy, rel=1e-9) if enthalpy else found < 100e3


def test_duty_and_flow_lead_back_to_each_other(run: Any) -> None:
    heat = run(*CONDENSER, "--mass-flow", "0.14 kg/s", "--json").json["findings"]["heat_rejected"]["value"]
    flow = run(*CONDENSER, "--heat", f"{heat!r} W", "--json").json["findings"]["mass_flow"]["value"]
    assert flow == pytest.approx(0.14, rel=1e-9)


def test_keep_keeps_once_what_is_the_same(run: Any, isolated: Path) -> None:
    first = run(*SUPERHEAT, "--keep", "--tag", "rack 2", "--note", "door open")
    assert "Logbook: kept as entry 1." in first.out
    again = run(*SUPERHEAT, "--keep", "--tag", "rack 2", "--note", "door open", "--json")
    assert again.json["kept"] == "already kept as entry 1"
    assert run("saturation", "R-134a", "-8 C", "--keep", "--json").json["kept"] == "kept as entry 2"
    entries = run("logbook", "list", "--json").json["entries"]
    assert [entry["number"] for entry in entries] == [2, 1]
    kept = entries[1]
    assert kept["tag"] == "rack 2"
    assert kept["note"] == "door open"
    assert kept["readings"]["suction_pressure"] == "2.6 bar g"
    assert kept["values"]["suction_pressure"] == 361325.0
    assert kept["findings"]["superheat"]["unit"] == "K"
    assert kept["program_version"] == __version__
    assert kept["library_version"].startswith("CoolProp ")
    assert (isolated / "logbook.sqlite3").exists()


def test_logbook_lists_newest_first_filters_and_shows(run: Any) -> None:
    assert run("logbook", "list").out == "The logbook is empty.\n"
    for celsius, rack in enumerate(("north", "middle", "south"), 1):
        run("saturation", "R-134a", f"{celsius} C", "--keep", "--tag", f"rack {rack}")
    lines = run("logbook", "list").out.splitlines()
    assert [line.split()[0] for line in lines] == ["3", "2", "1"]
    filtered = run("logbook", "list", "rack", "MIDDLE").out
    assert "rack middle" in filtered
    assert filtered.count("\n") == 1
    assert run("logbook", "list", "R-717").out == "No entry.\n"
    assert run("logbook", "list", "--most", "2").out.count("\n") == 2
    shown = run("logbook", "show", "2").out
    assert "site                    standard atmosphere at sea level" in shown
    assert "2 C" in shown
    assert "R-134a" in shown
    assert run("logbook", "show", "2", "--json").json["number"] == 2


def test_a_logbook_may_stand_elsewhere(run: Any, tmp_path: Path, isolated: Path) -> None:
    path = tmp_path / "elsewhere" / "plant.sqlite3"
    for words in (["--logbook", str(path), "saturation"], ["saturation", "--logbook", str(path)]):
        assert run(*words, "R-134a", "2 C", "--keep").status == 0
    assert path.exists()
    assert not isolated.exists()
    assert len(run("logbook", "list", "--logbook", str(path), "--json").json["entries"]) == 1


def test_remembered_settings_count_and_the_command_line_overrides_them(run: Any, isolated: Path) -> None:
    isolated.mkdir()
    (isolated / "settings.json").write_text(json.dumps({**SITE, "units": {"temperature": "°F"}}), encoding="utf-8")
    bare = run("convert", "2 bar", "--json").json
    assert bare["findings"]["absolute_pressure"]["value"] == 2e5
    assert bare["site"] == {"atmosphere": {"value": 83000.0, "unit": "Pa"}, "source": "barometer 83 kPa"}
    assert run("convert", "2 bar g", "--altitude", "0 m", "--json").json["site"]["atmosphere"]["value"] == 101325.0
    assert run("convert", "300 K").out.startswith("300 K   temperature: 80.3 °F")
    assert run("convert", "300 K", "--units", "si").out.startswith("300 K   temperature: 26.9 °C")


def test_damaged_settings_are_said(run: Any, isolated: Path) -> None:
    isolated.mkdir()
    (isolated / "settings.json").write_text("{")
    for words in (["convert", "2 bar"], ["saturation", "R-134a", "2 bar"]):
        assert any("settings.json is damaged" in note for note in run(*words, "--json").json["notes"])
        assert "settings.json is damaged" in run(*words).out


@pytest.mark.parametrize(
    ("part", "designation"),
    [
        ("134a", "R-134a"), ("r134A", "R-134a"), ("R 134a", "R-134a"), ("R-1234ze(E)", "R-1234ze(E)"),
        ("1234zeE", "R-1234ze(E)"), ("CO2", "R-744"), ("ammonia", "R-717"), ("propane", "R-290"),
    ],
)  # fmt: skip
def test_refrigerants_are_found_by_what_people_type(run: Any, part: str, designation: str) -> None:
    first = run("refrigerants", part, "--json").json["refrigerants"][0]
    assert first["designation"] == designation
    assert run("refrigerants", part).out.startswith(designation)
    assert run("saturation", part, "5 C", "--json").json["refrigerant"] == designation


def test_the_catalogue_is_listed_with_what_cannot_be_modelled(run: Any) -> None:
    listed = run("refrigerants", "--json").json["refrigerants"]
    assert len(listed) > 120
    by_name = {one["designation"]: one for one in listed}
    assert by_name["R-454C"]["safety_class"] == "A2L"
    assert sum(by_name["R-454C"]["composition"].values()) == pytest.approx(1.0)
    assert "IPCC" in by_name["R-454C"]["gwp_source"] or "AR" in by_name["R-454C"]["gwp_source"]
    unmodelled = [one for one in listed if not one["modelled"]]
    assert "R-401A" in {one["designation"] for one in unmodelled}
    assert all(one["reason"] for one in unmodelled)
    assert "NOT MODELLED" in run("refrigerants", "R-401A").out


def test_every_help_text_is_shown(run: Any) -> None:
    top = run("--help")
    assert top.status == 0
    commands = [line.split()[0] for line in top.out.partition("COMMAND\n")[2].splitlines() if line.startswith("    ")]
    commands = [word for word in commands if word.isalpha() and word.islower()]
    assert {"saturation", "superheat", "component", "convert", "refrigerants", "logbook"} <= set(commands)
    for command in ("saturation", "superheat", "component", "convert", "refrigerants", "logbook", "batch"):
        shown = run(command, "--help")
        assert (shown.status, shown.err) == (0, "")
        assert f"gaugeside {command}" in shown.out
    assert run("--version").out == f"gaugeside {__version__}\n"


def test_without_a_terminal_the_app_says_what_else_there_is(run: Any) -> None:
    found = run()
    assert found.status == 2
    assert "one-shot commands" in found.err


@pytest.mark.parametrize("name", EXAMPLES)
def test_the_example_under_each_help_can_be_copied_and_answers(
    run: Any, name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # The files that the examples name.
    monkeypatch.chdir(tmp_path)
    (tmp_path / "readings.csv").write_text("suction pressure [bar g],suction temperature [°C]\n2.6,12\n")
    if name == "logbook import":
        assert run("logbook", "export", "--to", "logbook.json").status == 0
    said = run(*name.split(), "--help").out
    example = said[said.index("  gaugeside ") :]
    assert all(len(line) <= 80 for line in example.splitlines())
    words = shlex.split(example.replace("\\\n", " "))
    assert words[: 1 + len(name.split())] == ["gaugeside", *name.split()]
    assert run(*words[1:]).status == 0
