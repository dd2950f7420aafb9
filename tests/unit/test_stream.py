"""The secondary side: naming a medium, solving for what is blank, what is assumed, what is refused."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.checks import CHECKS
from gaugeside.checks.sheet import Outcome, Surroundings
from gaugeside.checks.stream import CHECK, Findings, Readings, run
from gaugeside.checks.typed import first_choice, read_form
from gaugeside.cli import main
from gaugeside.errors import OutOfRange, Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Site
from gaugeside.refrigerants import Datum
from gaugeside.refrigerants.secondary import SOLUTIONS, Liquid, MoistAir, find_medium

ZERO = 273.15


def outcome(site: Site = SEA_LEVEL, **readings: Any) -> Outcome:
    return run(Surroundings(Datum.IIR, site), replace(Readings(), **readings))


def found(**readings: Any) -> Findings:
    result = outcome(**readings)
    assert result.unresolved is None
    findings: Findings = result.findings
    return findings


def refused(**readings: Any) -> Refusal:
    with pytest.raises(Refusal) as refusal:
        outcome(**readings)
    assert refusal.value.hint
    return refusal.value


def said(result: Outcome) -> str:
    return " ".join(remark.text for remark in (*result.notes, *result.cautions))


# Naming a medium


@pytest.mark.parametrize(
    ("text", "title"),
    [
        ("water", "water"),
        ("  Chilled  Water ", "water"),
        ("AIR", "air"),
        ("propylene glycol 30 %", "propylene glycol 30 % by mass"),
        ("PG 30%", "propylene glycol 30 % by mass"),
        ("pg30%", "propylene glycol 30 % by mass"),
        ("PG-30%", "propylene glycol 30 % by mass"),
        ("30 % propylene glycol", "propylene glycol 30 % by mass"),
        ("propylene glycol 30", "propylene glycol 30 % by mass"),
        ("MEG 25 %", "ethylene glycol 25 % by mass"),
        ("ethylene glycol/water 25,5 % w/w", "ethylene glycol 25.5 % by mass"),
        ("CaCl2 20 %", "calcium chloride 20 % by mass"),
        ("NaCl brine 20 % by mass", "sodium chloride 20 % by mass"),
        ("K2CO3 30 %", "potassium carbonate 30 % by mass"),
        ("potassium formate 0.4 kg/kg", "potassium formate 40 % by mass"),
        ("ammonia water 15 %", "ammonia solution 15 % by mass"),
        ("sea water 3.5 %", "sea water 3.5 % by mass"),
    ],
)
def test_a_medium_is_found_as_people_write_it(text: str, title: str) -> None:
    assert find_medium(text).title() == title


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("propylene glycol", ("not said", "0.5 to 60 % by mass")),
        ("CaCl2", ("not said", "calcium chloride 20 %")),
        ("glycol 30 %", ("propylene or ethylene", "ethylene glycol 30 %")),
        ("pg 30 vol%", ("by volume", "by mass")),
        ("pg 30 % v/v", ("by volume", "by mass")),
        ("pg 70 %", ("70 %", "0.5 to 60 %")),
        ("pg 0 %", ("0 %", "Write water")),
        ("pg -30 %", ("below zero",)),
        ("pg 0.3", ("0.3 %", "30 %")),
        ("MgCl2 25 %", ("0.5 to 21 %",)),
        ("propilene glycol 30 %", ("Did you mean propylene glycol",)),
        ("watr", ("Did you mean water",)),
        ("50/50 glycol", ("more than one number",)),
        ("water 30 %", ("no concentration",)),
        ("air 50 %", ("no concentration", "humidity")),
        ("brine 20 %", ("not a medium", "calcium chloride")),
        ("30 %", ("not a medium",)),
        ("", ("not a medium",)),
    ],
)
def test_a_medium_that_is_not_clear_is_refused(text: str, words: tuple[str, ...]) -> None:
    with pytest.raises(Refusal) as refusal:
        find_medium(text)
    assert refusal.value.field == "medium"
    for word in words:
        assert word in refusal.value.sentence()


@given(st.text(max_size=80))
def test_any_text_names_a_medium_or_is_refused(text: str) -> None:
    try:
        name = find_medium(text).name
    except Refusal as refusal:
        name = refusal.field or ""
    assert name in (*SOLUTIONS, "water", "air", "medium")


def test_every_solution_is_a_sane_liquid_over_its_whole_range() -> None:
    for name in SOLUTIONS:
        for share in (0.5, 3.0, 10.0, 20.0, 30.0, 45.0, 60.0):
            try:
                liquid = Liquid(find_medium(f"{name} {share} %"), SEA_LEVEL.atmosphere)
            except OutOfRange:
                continue
            temperatures = [liquid.lowest + (liquid.highest - liquid.lowest) * i / 20 for i in range(21)]
            enthalpies = [liquid.enthalpy(t) for t in temperatures]
            assert enthalpies == sorted(enthalpies)
            assert all(1500 < liquid.heat_capacity(t) < 4600 for t in temperatures)
            assert all(800 < liquid.density(t) < 1500 for t in temperatures)


def test_naming_a_medium_loads_no_property_library() -> None:
    code = "import sys; from gaugeside.refrigerants.secondary import find_medium; import gaugeside.checks.stream; "
    code += "find_medium('pg 30 %'); print('CoolProp' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, text=True).stdout.strip() == "False"


# Solving

LIQUIDS = ("water", "propylene glycol 30 %", "ethylene glycol 40 %", "calcium chloride 20 %", "potassium formate 30 %")


@settings(max_examples=40, deadline=None)
@given(
    medium=st.sampled_from(LIQUIDS),
    inlet=st.floats(1.0, 35.0),
    rise=st.floats(0.5, 4.0) | st.floats(-0.9, -0.1),
    flow=st.floats(0.01, 100.0),
    kind=st.sampled_from(["mass flow", "volume flow"]),
    flow_at=st.sampled_from([None, "inlet", "outlet"]),
    power=st.none() | st.floats(0.0, 50.0),
)
def test_every_blank_of_a_liquid_is_solved_back(
    medium: str, inlet: float, rise: float, flow: float, kind: str, flow_at: str | None, power: float | None
) -> None:
    flow = flow if kind == "mass flow" else flow / 1000
    typed: dict[str, Any] = {
        "medium": medium,
        "inlet": ZERO + inlet,
        "outlet": ZERO + inlet + rise,
        "flow": {kind: flow},
        "flow_at": flow_at,
        "fan_or_pump_heat": power,
    }
    first = found(**typed)
    solved_back(typed, first)
    liquid = Liquid(find_medium(medium), SEA_LEVEL.atmosphere)
    gained = first.mass_flow * (liquid.enthalpy(typed["outlet"]) - liquid.enthalpy(typed["inlet"]))
    heat = first.heat_absorbed if first.heat_absorbed is not None else -first.heat_rejected
    assert heat + (power or 0.0) == pytest.approx(gained, rel=1e-9, abs=1e-9)


def test_a_form_left_as_it_opens_says_no_direction_and_the_temperatures_tell_it() -> None:
    opened = CHECK.reading_line("heat_direction").choices[0]
    for outlet, name in ((ZERO + 7, "heat_rejected"), (ZERO + 17, "heat_absorbed")):
        told = outcome(medium="water", inlet=ZERO + 12, outlet=outlet, flow={"mass flow": 1.0}, heat_direction=opened)
        assert told.unresolved is None
        # Heat capacity of water near 10 °C: 4.19 kJ/(kg K), any table of water.
        assert getattr(told.findings, name) == pytest.approx(5 * 4190, rel=0.01)


def solved_back(typed: dict[str, Any], first: Findings) -> None:
    """Leave each of flow, inlet and outlet blank with the heat just found, and find it again."""
    absorbs = first.heat_absorbed is not None
    heat = first.heat_absorbed if absorbs else first.heat_rejected
    given = {**typed, "heat": heat, "heat_direction": "absorbed" if absorbs else "given off"}
    flow = found(**{**given, "flow": None})
    assert flow.mass_flow == pytest.approx(first.mass_flow, rel=1e-9)
    assert flow.volume_flow == pytest.approx(first.volume_flow, rel=1e-9)
    for place in ("inlet", "outlet"):
        back = found(**{**given, place: None})
        assert getattr(back, f"{place}_temperature") == pytest.approx(typed[place], abs=1e-7)
        # The heat that the temperatures found give again closes on what was typed.
        again = found(**{**typed, place: getattr(back, f"{place}_temperature")})
        assert (again.heat_absorbed if absorbs else again.heat_rejected) == pytest.approx(heat, rel=1e-9)


@settings(max_examples=15, deadline=None)
@given(
    inlet=st.floats(5.0, 35.0),
    drop=st.floats(2.0, 20.0),
    entering=st.floats(0.2, 0.9),
    leaving=st.none() | st.floats(0.85, 1.0),
    flow=st.floats(0.1, 5.0),
    power=st.none() | st.floats(1.0, 300.0),
)
def test_every_blank_of_cooled_air_is_solved_back(
    inlet: float, drop: float, entering: float, leaving: float | None, flow: float, power: float | None
) -> None:
    typed: dict[str, Any] = {
        "medium": "air",
        "inlet": ZERO + inlet,
        "outlet": ZERO + inlet - drop,
        "flow": {"volume flow": flow},
        "inlet_relative_humidity": entering,
        "outlet_relative_humidity": leaving,
        "fan_or_pump_heat": power,
    }
    first = found(**typed)
    if first.heat_rejected is not None and first.heat_rejected > 1.0:
        solved_back(typed, first)
    air = MoistAir(SEA_LEVEL.atmosphere)
    enthalpies = [
        air.enthalpy(getattr(first, f"{p}_temperature"), getattr(first, f"{p}_humidity_ratio"))
        for p in ("inlet", "outlet")
    ]
    water = (first.inlet_humidity_ratio - first.outlet_humidity_ratio) * air.water_enthalpy(typed["outlet"])
    gained = first.dry_air_flow * (enthalpies[1] - enthalpies[0] + water)
    heat = first.heat_absorbed if first.heat_absorbed is not None else -first.heat_rejected
    assert heat + (power or 0.0) == pytest.approx(gained, rel=1e-9, abs=1e-6)
    whole = first.sensible_heat + first.latent_heat
    assert whole == pytest.approx(abs(heat), rel=1e-9, abs=1e-6)


def test_cooled_air_drops_the_water_it_cannot_hold() -> None:
    typed = {"medium": "air", "inlet": ZERO + 27, "outlet": ZERO + 14, "inlet_relative_humidity": 0.5,
             "flow": {"volume flow": 1 / 3}}  # fmt: skip
    first = found(**typed, outlet_relative_humidity=0.95)
    lost = first.dry_air_flow * (first.inlet_humidity_ratio - first.outlet_humidity_ratio)
    assert first.condensate_flow == pytest.approx(lost, rel=1e-12)
    assert first.mass_flow == pytest.approx(first.dry_air_flow * (1 + first.inlet_humidity_ratio), rel=1e-12)
    assert first.sensible_heat_ratio == pytest.approx(first.sensible_heat / first.heat_rejected)
    assert first.water_taken_up is None


def test_frost_counts_as_ice() -> None:
    typed = {"medium": "air", "outlet": ZERO - 1, "inlet_relative_humidity": 0.8, "flow": {"mass flow": 1.0}}
    result = outcome(**typed, inlet=ZERO + 4, outlet_relative_humidity=0.95)
    freezing, flow = result.findings, result.findings.condensate_flow
    assert "Frost" in said(result)
    air = MoistAir(SEA_LEVEL.atmosphere)
    # The melting enthalpy of what freezes comes on top of its condensation (IAPWS: 333.4 kJ/kg at 0 °C).
    assert air.water_enthalpy(ZERO) - air.water_enthalpy(ZERO - 1e-9) == pytest.approx(333.4e3, rel=1e-3)
    assert freezing.latent_heat == pytest.approx(flow * 2.83e6, rel=0.02)


def test_wet_bulbs_stand_for_humidities() -> None:
    typed = {"medium": "air", "inlet": ZERO + 27, "outlet": ZERO + 14, "flow": {"mass flow": 1.0}}
    dry = found(**typed, inlet_relative_humidity=0.5, outlet_relative_humidity=0.95)
    wet = found(**typed, inlet_wet_bulb=dry.inlet_wet_bulb, outlet_wet_bulb=dry.outlet_wet_bulb)
    # The library iterates a wet bulb to about 1e-6.
    assert wet.heat_rejected == pytest.approx(dry.heat_rejected, rel=1e-4)


def test_the_volume_flow_counts_where_it_is_measured() -> None:
    typed = {"medium": "air", "inlet": ZERO + 10, "outlet": ZERO + 40, "inlet_relative_humidity": 0.5,
             "flow": {"volume flow": 1.0}}  # fmt: skip
    at_inlet, at_outlet = found(**typed), found(**typed, flow_at="outlet")
    # Warm air is thinner as the absolute temperatures.
    assert at_inlet.heat_absorbed / at_outlet.heat_absorbed == pytest.approx(313.15 / 283.15, rel=2e-3)
    assert "measured at the inlet, none being said" in said(outcome(**typed))
    assert "none being said" not in said(outcome(**typed, flow_at="inlet"))


def test_thin_air_carries_less_heat() -> None:
    typed = {"medium": "air", "inlet": ZERO + 10, "outlet": ZERO + 20, "inlet_relative_humidity": 0.3,
             "flow": {"volume flow": 1.0}}  # fmt: skip
    high = outcome(Site(83000.0, "barometer 83 kPa"), **typed).findings
    assert high.heat_absorbed / found(**typed).heat_absorbed == pytest.approx(83000 / 101325, rel=5e-3)


def test_fan_and_pump_heat_is_taken_off_what_passes_the_wall() -> None:
    typed = {"medium": "water", "inlet": ZERO + 12, "outlet": ZERO + 7, "flow": {"mass flow": 1.0}}
    with_pump = found(**typed, fan_or_pump_heat=1000.0)
    assert with_pump.heat_rejected == pytest.approx(found(**typed).heat_rejected + 1000.0)
    assert "The fan or pump heats the stream" in said(outcome(**typed, fan_or_pump_heat=1000.0))


# What is assumed


def test_assumptions_about_air_are_named() -> None:
    cooled = {"medium": "air", "inlet": ZERO + 27, "inlet_relative_humidity": 0.5, "flow": {"mass flow": 1.0}}
    dew = found(**cooled, outlet=ZERO + 20).inlet_dew_point
    assert "No condensation is assumed" in said(outcome(**cooled, outlet=dew + 0.5))
    below = outcome(**cooled, outlet=dew - 2)
    assert "taken as saturated" in said(below)
    assert below.findings.outlet_relative_humidity == 1.0
    assert "No water is taken up" in said(outcome(**cooled, outlet=ZERO + 30))
    warmed = {"medium": "air", "inlet": ZERO + 30, "outlet": ZERO + 42, "flow": {"mass flow": 1.0}}
    assumed = outcome(**warmed)
    assert "{humidity} relative humidity, as none is typed" in said(assumed)
    assert assumed.findings.inlet_relative_humidity == pytest.approx(0.5)
    # What the assumption is said to be: of little weight.
    for humidity in (0.1, 1.0):
        other = found(**warmed, inlet_relative_humidity=humidity)
        assert other.heat_absorbed == pytest.approx(assumed.findings.heat_absorbed, rel=0.03)


def test_cooled_air_needs_its_humidity() -> None:
    refusal = refused(medium="air", inlet=ZERO + 27, outlet=ZERO + 14, flow={"mass flow": 1.0})
    assert refusal.field == "inlet_relative_humidity"
    assert "condensing" in refusal.message


# Freezing and boiling


def test_near_freezing_is_a_caution_and_below_it_a_refusal() -> None:
    typed = {"medium": "propylene glycol 30 %", "inlet": ZERO - 5, "flow": {"mass flow": 1.0}}
    safe = outcome(**typed, outlet=ZERO - 9)
    freezing = safe.findings.freezing_temperature
    assert "begins to freeze" not in said(safe)
    assert "begins to freeze" in said(outcome(**typed, outlet=freezing + 2.9))
    refusal = refused(**typed, outlet=freezing - 0.1)
    assert (refusal.field, "begins to freeze" in refusal.message) == ("outlet", True)
    assert "begins to freeze" in said(outcome(medium="water", inlet=ZERO + 7, outlet=ZERO + 2.5, flow={"mass flow": 1}))
    assert found(medium="water", inlet=ZERO + 4, outlet=ZERO, flow={"mass flow": 1}).heat_rejected > 0


@pytest.mark.parametrize(
    ("readings", "field", "words"),
    [
        ({"medium": "water", "inlet": ZERO - 1, "outlet": ZERO + 5}, "inlet", "begins to freeze"),
        ({"medium": "water", "inlet": ZERO + 90, "outlet": ZERO + 101}, "outlet", "boils"),
        ({"medium": "sea water 3.5 %", "inlet": ZERO - 1, "outlet": ZERO + 5}, "inlet", "range of the data"),
        ({"medium": "sea water 3.5 %", "inlet": ZERO + 110, "outlet": ZERO + 5}, "inlet", "boils"),
        ({"medium": "CaCl2 20 %", "inlet": ZERO + 50, "outlet": ZERO + 5}, "inlet", "range of the data"),
        ({"medium": "pg 30 %", "inlet": ZERO - 20, "outlet": ZERO + 5}, "inlet", "begins to freeze"),
        ({"medium": "air", "inlet": ZERO - 80, "outlet": ZERO + 5}, "inlet", "covered here"),
        ({"medium": "air", "inlet": ZERO + 20, "outlet": ZERO + 95}, "outlet", "covered here"),
        ({"medium": "air", "inlet": ZERO + 20, "outlet": ZERO + 25, "pressure": 3e6}, "pressure", "covered"),
        ({"medium": "water", "inlet": ZERO + 20, "outlet": ZERO + 25, "pressure": 100.0}, "pressure", "covered"),
        ({"medium": "water", "inlet": ZERO + 20, "outlet": ZERO + 25, "inlet_wet_bulb": 290.0}, "inlet_wet_bulb", "no"),
        (
            {"medium": "air", "inlet": ZERO + 20, "outlet": ZERO + 25, "inlet_wet_bulb": ZERO + 22},
            "inlet_wet_bulb",
            "above the dry bulb",
        ),
        (
            {"medium": "air", "inlet": ZERO + 40, "outlet": ZERO + 25, "inlet_wet_bulb": ZERO + 5},
            "inlet_wet_bulb",
            "dry air",
        ),
        (
            {"medium": "air", "inlet": 313.0, "outlet": 298.0, "inlet_wet_bulb": 290.0, "inlet_relative_humidity": 1.0},
            "inlet_wet_bulb",
            "Both",
        ),
        ({"medium": "water", "inlet": 293.0, "outlet": 298.0, "fan_or_pump_heat": -5.0}, "fan_or_pump_heat", "minus"),
    ],
)  # fmt: skip
def test_what_cannot_be_is_refused(readings: dict[str, Any], field: str, words: str) -> None:
    refusal = refused(**readings, flow={"mass flow": 1.0})
    assert refusal.field == field
    assert words in refusal.message


def test_hot_water_under_pressure_is_a_liquid() -> None:
    assert found(
        medium="water", inlet=ZERO + 110, outlet=ZERO + 90, flow={"mass flow": 1.0}, pressure=3e5
    ).heat_rejected == pytest.approx(84.4e3, rel=5e-3)


# Blanks


@pytest.mark.parametrize(
    ("readings", "field", "words"),
    [
        ({"inlet": 288.15, "outlet": 298.15}, "flow", "2 are blank: flow and heat"),
        ({"inlet": 288.15}, "flow", "3 are blank: outlet, flow and heat"),
        ({"inlet": 288.15, "heat": 1e3}, "flow", "2 are blank: outlet and flow"),
        ({"inlet": 288.15, "outlet": 298.15, "flow": {"mass flow": 1.0}, "heat": 42e3}, "heat", "+0.4 % apart"),
        ({"inlet": 288.15, "flow": {"mass flow": 1.0}, "heat": 1e3}, "heat_direction", "absorbs the heat or"),
        ({"inlet": 298.15, "outlet": 288.15, "heat": 1e3, "heat_direction": "absorbed"}, "heat_direction", "gives off"),
        ({"inlet": 288.15, "outlet": 288.15, "heat": 1e3}, "outlet", "the same"),
        ({"inlet": 298.15, "outlet": 288.15, "heat": 1e3, "fan_or_pump_heat": 2e3}, "fan_or_pump_heat", "alone"),
    ],
)  # fmt: skip
def test_blanks_that_cannot_be_filled_are_told(readings: dict[str, Any], field: str, words: str) -> None:
    refusal = outcome(medium="water", **readings).unresolved
    assert refusal is not None
    assert refusal.field == field
    assert words in refusal.message
    assert refusal.hint


def test_a_heat_beyond_the_range_is_refused() -> None:
    refusal = refused(
        medium="water", inlet=ZERO + 20, flow={"mass flow": 1.0}, heat=1e6, heat_direction="absorbed"
    )  # fmt: skip
    assert (refusal.field, "No outlet fits" in refusal.message) == ("outlet", True)


def test_a_wet_bulb_does_not_fix_a_blank_temperature() -> None:
    refusal = refused(
        medium="air", inlet=300.0, flow={"mass flow": 1.0}, heat=1e3, heat_direction="given off",
        inlet_relative_humidity=0.5, outlet_wet_bulb=285.0,
    )  # fmt: skip
    assert (refusal.field, "does not fix" in refusal.message) == ("outlet_wet_bulb", True)


# The form and the command line


def test_the_form_asks_for_humidity_only_of_air() -> None:
    humid = [line for line in CHECK.reading_lines() if line.only]
    assert len(humid) == 4
    for medium, meant in (("Moist  Air", True), ("air", True), ("water", False), ("", False)):
        typed = read_form(CHECK, {"medium": medium}, {}, Dress(), SEA_LEVEL)
        assert all(line.meant(first_choice(CHECK, typed)) is meant for line in humid)
    typed = read_form(CHECK, {"medium": "water", "inlet_wet_bulb": "12 C"}, {}, Dress(), SEA_LEVEL)
    refusal = typed["inlet_wet_bulb"].refusal
    assert refusal is not None
    assert refusal.message == "Water takes no inlet wet bulb here."


def test_the_check_needs_no_refrigerant() -> None:
    assert CHECKS["stream"] is CHECK
    assert not CHECK.needs_refrigerant


def asked(capsys: pytest.CaptureFixture[str], *words: str) -> dict[str, Any]:
    assert main(["stream", *words, "--json"]) == 0
    document: dict[str, Any] = json.loads(capsys.readouterr().out)
    return document


def test_the_command_line_answers(capsys: pytest.CaptureFixture[str]) -> None:
    water = asked(capsys, "water", "--inlet", "15 C", "--outlet", "25 C", "--flow", "29 kg/min")["findings"]
    assert water["heat_absorbed"]["unit"] == "W"
    assert "heat_rejected" not in water
    brine = asked(capsys, "PG 30%", "--inlet", "-3 C", "--outlet", "-8 C", "--flow", "4 m3/h")["findings"]
    assert brine["medium"] == {"value": "propylene glycol 30 % by mass", "unit": ""}
    assert "heat_absorbed" not in brine
    air = asked(
        capsys, "air", "--inlet", "27 C", "--inlet-relative-humidity", "50 %", "--outlet", "14 C",
        "--outlet-relative-humidity", "95 %", "--flow", "1200 m3/h",
    )["findings"]  # fmt: skip
    assert air["inlet_humidity_ratio"]["unit"] == "kg/kg"
    assert air["heat_rejected"]["value"] == pytest.approx(air["sensible_heat"]["value"] + air["latent_heat"]["value"])


def test_the_command_line_prints_a_sheet(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["stream", "pg 30 %", "--inlet", "-3 C", "--heat", "20 kW", "--heat-direction", "given off",
                 "--flow", "4 m3/h"]) == 0  # fmt: skip
    sheet = capsys.readouterr().out
    assert "heat given off          20.00 kW       5.69 TR       by the propylene glycol" in sheet
    assert "propylene glycol 30 % by mass" in sheet
    assert "outlet" in sheet


def test_the_command_line_refuses_with_the_field(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["stream", "glycol 30 %", "--inlet", "15 C", "--json"]) == 2
    assert json.loads(capsys.readouterr().out)["error"]["field"] == "medium"
    assert main(["stream", "water", "--inlet", "15 C", "--outlet", "25 C"]) == 2
    assert "2 are blank" in capsys.readouterr().err


@pytest.mark.parametrize("text", ["PG30", "brine", "brine 20 %", "oil", "propilene glycol 30 %"])
def test_an_unknown_medium_is_answered_with_all_that_there_are_and_how_a_concentration_is_written(text: str) -> None:
    with pytest.raises(Refusal) as refusal:
        find_medium(text)
    sentence = refusal.value.sentence()
    assert f"'{text}' is not a medium known here." in sentence
    assert "its concentration by mass, for example propylene glycol 30 %" in sentence
    for name in ("water", "air", *SOLUTIONS):
        assert name in sentence
    # What is offered as an example is understood.
    assert find_medium("propylene glycol 30 %").fraction == pytest.approx(0.3)


def test_the_mean_heat_capacity_is_marked_so() -> None:
    """Water from 10 to 30 °C: 4.18 kJ/(kg K) to three digits (common handbook value)."""
    result = outcome(medium="water", inlet=ZERO + 10, outlet=ZERO + 30, flow={"mass flow": 1.0})
    assert result.remarks["specific_heat_capacity"].text == "mean"
    assert result.findings.specific_heat_capacity == pytest.approx(4180, abs=10)
