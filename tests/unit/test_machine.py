"""The whole machine: what follows from which readings, where each figure comes from, and what the program says.

The readings are invented. Expectations are identities (first law, Carnot, definitions) or changes of a reading whose
effect is known.
"""

from __future__ import annotations

from typing import Any

import pytest

from gaugeside.checks.perform import perform, request
from gaugeside.checks.sheet import Answer
from gaugeside.checks.view import sentence
from gaugeside.quantities import SEA_LEVEL, Dress

# An invented cold store machine with R-134a, absolute pressures and kelvin.
COLD_STORE: dict[str, Any] = {
    "suction_pressure": 2.0e5,
    "suction_temperature": 273.15,
    "discharge_pressure": 10.1e5,
    "discharge_temperature": 341.15,
    "liquid_temperature": 306.15,
}


def ask(refrigerant: str = "R-134a", **values: Any) -> dict[str, Any]:
    return perform(request("machine", refrigerant, values, site=SEA_LEVEL, datum="iir", dress=Dress()))


def answer(refrigerant: str = "R-134a", **values: Any) -> Answer:
    reply = ask(refrigerant, **values)
    assert "answer" in reply, reply
    return Answer.from_plain(reply["answer"])


def words(given: Answer) -> str:
    return " ".join(sentence(remark, Dress(), SEA_LEVEL) for remark in (*given.cautions, *given.notes))


def test_energy_closes_around_the_machine():
    found = answer(**COLD_STORE, mass_flow=0.14).findings
    assert found["heat_absorbed"] + found["power_to_refrigerant"] == pytest.approx(found["heat_rejected"], rel=1e-9)
    assert found["cop_heat_pump"] == pytest.approx(found["cop_refrigerator"] + 1, rel=1e-9)


@pytest.mark.parametrize(
    ("given", "source"),
    [
        ({"electrical_power": 6.8e3, "drive": "hermetic"}, "power and enthalpy rise"),
        ({"electrical_power": 8e3, "drive": "open", "motor_efficiency": 0.85}, "power and enthalpy rise"),
        ({"heat_rejected": 28.5e3}, "from the heat rejected"),
        ({"heat_absorbed": 21.7e3}, "from the heat absorbed"),
        ({"displacement": 0.02, "volumetric_efficiency": 0.7}, "from the displacement"),
        ({"mass_flow": 0.14}, "as typed"),
    ],
)
def test_mass_flow_names_its_source_and_explains_the_reading_it_came_from(given: dict[str, Any], source: str):
    given_answer = answer(**COLD_STORE, **given)
    found = given_answer.findings
    assert source in given_answer.remarks["mass_flow"].text
    if "electrical_power" in given:
        into = given["electrical_power"] * given.get("motor_efficiency", 1.0)
        assert found["power_to_refrigerant"] == pytest.approx(into, rel=1e-12)
    for name in ("heat_rejected", "heat_absorbed", "mass_flow"):
        if name in given:
            assert found[name] == given[name]
    assert found["heat_absorbed"] + found["power_to_refrigerant"] == pytest.approx(found["heat_rejected"], rel=1e-9)


def test_shell_loss_leaves_less_for_the_refrigerant():
    without = answer(**COLD_STORE, electrical_power=8e3, drive="hermetic").findings
    lossy = answer(**COLD_STORE, electrical_power=8e3, drive="hermetic", shell_loss=400.0).findings
    assert lossy["mass_flow"] == pytest.approx(without["mass_flow"] * (8e3 - 400) / 8e3, rel=1e-12)
    assert lossy["heat_absorbed"] + 8e3 - 400 == pytest.approx(lossy["heat_rejected"], rel=1e-9)


@pytest.mark.parametrize(
    ("given", "wanted", "value"),
    [
        ({"heat_rejected": 30e3, "electrical_power": 8e3, "drive": "hermetic"}, "heat_absorbed", 22e3),
        ({"heat_absorbed": 22e3, "electrical_power": 8e3, "drive": "hermetic"}, "heat_rejected", 30e3),
        ({"heat_rejected": 30e3, "heat_absorbed": 22e3}, "power_to_refrigerant", 8e3),
    ],
)
def test_two_of_the_three_give_the_third_without_any_state(given: dict[str, Any], wanted: str, value: float):
    found = answer(**given).findings
    assert found[wanted] == pytest.approx(value, rel=1e-12)
    # 22 kW of cold for 8 kW.
    assert found["cop_refrigerator"] == pytest.approx(22 / 8, rel=1e-12)


def test_cops_say_which_power_they_use():
    hermetic = answer(**COLD_STORE, electrical_power=8e3, drive="hermetic")
    assert "electrical power" in hermetic.remarks["cop_refrigerator"].text
    metered = answer(**COLD_STORE, mass_flow=0.14)
    assert "power to refrigerant" in metered.remarks["cop_refrigerator"].text


def test_limit_between_space_and_sink():
    found = answer(
        **COLD_STORE, mass_flow=0.14, electrical_power=7.5e3, drive="hermetic", space_temperature=275.15,
        sink_temperature=301.15,
    ).findings  # fmt: skip
    # Carnot: T_L / (T_H - T_L) with 275.15 K and 26 K between the two.
    assert found["reversible_cop_refrigerator"] == pytest.approx(275.15 / 26, rel=1e-12)
    assert found["minimum_power"] == pytest.approx(found["heat_absorbed"] * 26 / 275.15, rel=1e-12)
    assert found["second_law_efficiency"] == pytest.approx(
        found["cop_refrigerator"] / found["reversible_cop_refrigerator"], rel=1e-12
    )


def test_refrigerant_temperatures_typed_for_space_and_sink_are_told():
    evaporating = answer(**COLD_STORE)
    assert "cooled space is not warmer" not in words(evaporating)
    # -10 °C and 39.5 °C are this machine's own saturation temperatures at 2.0 and 10.1 bar abs, within a kelvin.
    mixed_up = answer(**COLD_STORE, space_temperature=263.0, sink_temperature=313.0)
    assert "cooled space is not warmer" in words(mixed_up)
    assert "heat sink is not colder" in words(mixed_up)


def test_a_wrong_sensor_shows_in_the_closure_and_is_named():
    right = answer(**COLD_STORE, mass_flow=0.14)
    rejected, work = right.findings["heat_rejected"], right.findings["power_to_refrigerant"]
    agreeing = answer(**COLD_STORE, mass_flow=0.14, heat_rejected=rejected, electrical_power=work, drive="hermetic")
    assert abs(agreeing.findings["heat_balance_closure"]) < 1e-9
    assert "Fits worst" not in words(agreeing)
    wrong = answer(**COLD_STORE, mass_flow=0.14, heat_rejected=rejected * 1.4, electrical_power=work, drive="hermetic")
    # Q_L + W stays, Q_H is 1.4 times what it was: 1/1.4 - 1.
    assert wrong.findings["heat_balance_closure"] == pytest.approx(1 / 1.4 - 1, rel=1e-9)
    told = sentence(wrong.cautions[0], Dress(), SEA_LEVEL)
    assert "does not close" in told
    # The other two agree, so the middle is theirs.
    assert told.endswith("Fits worst with the rest: the heat rejected, +40 % from the middle.")


def test_two_mass_flows_apart_do_not_accuse_either():
    apart = answer(**COLD_STORE, mass_flow=0.14, heat_rejected=40e3)
    assert "two alone do not show which is wrong" in words(apart)


def test_suction_line_heat_is_counted_once():
    found = answer(
        **COLD_STORE, mass_flow=0.14, evaporator_pressure=2.05e5, evaporator_outlet_temperature=267.15
    ).findings
    whole = answer(**COLD_STORE, mass_flow=0.14).findings
    assert found["heat_absorbed"] < whole["heat_absorbed"]
    assert found["heat_rejected"] == pytest.approx(whole["heat_rejected"], rel=1e-12)


def test_transcritical_carbon_dioxide_runs_through_a_gas_cooler():
    given = answer(
        "R-744",
        suction_pressure=27e5,
        suction_temperature=273.15,
        discharge_pressure=92e5,
        discharge_temperature=378.15,
        liquid_temperature=308.15,
        electrical_power=12e3,
        drive="hermetic",
    )
    found = given.findings
    assert "subcooling" not in found
    assert found["heat_absorbed"] + 12e3 == pytest.approx(found["heat_rejected"], rel=1e-9)
    assert 0 < found["flash_fraction"] < 1


def test_what_is_missing_is_named():
    given = answer(suction_pressure=2.0e5, suction_temperature=273.15, discharge_pressure=10.1e5)
    assert "discharge (pipe)" in words(given)
    assert "liquid (pipe)" in words(given)
    assert "No mass flow" in words(given)


@pytest.mark.parametrize(
    ("given", "field", "says"),
    [
        ({}, "suction_pressure", "No reading"),
        ({"electrical_power": 8e3}, "drive", "alone does not say"),
        ({"electrical_power": 8e3, "drive": "hermetic", "motor_efficiency": 0.9}, "motor_efficiency", "open drive"),
        ({"electrical_power": 8e3, "drive": "hermetic", "shell_loss": 9e3}, "shell_loss", "not below the power"),
        ({"suction_pressure": 9e5, "discharge_pressure": 2e5}, "discharge_pressure", "does not compress"),
        ({"mass_flow": 0.0, "suction_pressure": 2e5}, "mass_flow", "not above zero"),
    ],
)
def test_refusals_name_field_and_reason(given: dict[str, Any], field: str, says: str):
    error = ask(**given)["error"]
    assert error["field"] == field
    assert says in error["message"]
    assert error["hint"]


def test_liquid_that_is_not_liquid_is_told():
    assert "not liquid as typed" in words(answer(**{**COLD_STORE, "liquid_temperature": 315.15}, mass_flow=0.14))


def test_a_balance_that_does_not_close_stands_before_every_other_caution():
    # Below the atmosphere and with a hot discharge there are others.
    given = answer(suction_pressure=0.8e5, discharge_pressure=10.1e5, heat_absorbed=20e3, heat_rejected=40e3,
                   electrical_power=8e3, drive="hermetic")  # fmt: skip
    told = [sentence(remark, Dress(), SEA_LEVEL) for remark in given.cautions]
    assert len(told) > 2
    # 20 + 8 = 28 kW, and 28/40 - 1 = -30 %.
    assert "does not close within 10 %" in told[0]
    assert "absorbed + power 28.00 kW, rejected 40.00 kW: off by 30 %" in told[0]
    assert given.remarks["heat_balance_closure"].text == "absorbed + power against rejected"
    # Three amounts alone do not show which of them is wrong.
    assert "Fits worst" not in words(given)


def test_what_enters_and_leaves_beside_the_heat_exchangers_is_named_in_the_balance():
    given = answer(
        **COLD_STORE, mass_flow=0.14, heat_rejected=40e3, shell_loss=500.0, evaporator_pressure=2.05e5,
        evaporator_outlet_temperature=267.15,
    )  # fmt: skip
    supplied = given.findings["heat_rejected"] * (1 + given.findings["heat_balance_closure"])
    told = sentence(given.cautions[0], Dress(), SEA_LEVEL)
    assert f"absorbed + suction line + power less shell loss {supplied / 1e3:.2f} kW" in told


@pytest.mark.parametrize(
    ("changed", "says"),
    [
        ({"liquid_temperature": 315.15}, "not liquid as typed"),
        ({"suction_temperature": 260.15}, "not vapour as typed"),
        ({"mass_flow": 0.14, "heat_rejected": 60e3}, "two alone do not show which is wrong"),
        ({"heat_absorbed": 30e3, "heat_rejected": 20e3, "liquid_temperature": None}, "contradict each other"),
        ({"discharge_temperature": 314.15}, "Isentropic efficiency above 100 %"),
        ({"suction_pressure": 7e5, "suction_temperature": 303.15, "discharge_temperature": 433.15}, "efficiency below"),
        ({"mass_flow": 0.14, "displacement": 0.005}, "Volumetric efficiency above 100 %"),
        ({"heat_absorbed": 200e3, "heat_rejected": 204e3, "space_temperature": 275.15, "sink_temperature": 301.15,
          "suction_temperature": None},
         "Second-law efficiency above 100 %"),
    ],
)  # fmt: skip
def test_readings_that_cannot_be_are_a_caution(changed: dict[str, Any], says: str):
    typed = {name: value for name, value in {**COLD_STORE, **changed}.items() if value is not None}
    given = answer(**typed)
    assert any(says in sentence(remark, Dress(), SEA_LEVEL) for remark in given.cautions), given.cautions
    assert not any(says in remark.text for remark in given.notes)
