"""Pictures: what stands where is read back from the drawn characters, by the drawing's own axes."""

from __future__ import annotations

import json
import math
import re
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from gaugeside.checks.perform import perform, request
from gaugeside.checks.picture import Picture, PictureKind, PicturePoint
from gaugeside.cli import main
from gaugeside.drawing import Axis, Drawing, draw, even_ticks, logarithmic_ticks
from gaugeside.quantities import Dress, Kind, Sense, Site
from gaugeside.refrigerants import find, open_fluid

SITE = Site()
SI, IP = Dress(), Dress("ip")
SIZES = [(80, 18), (78, 16), (100, 30), (40, 10)]

# Invented readings of an ordinary cold-store machine, as a check takes them [Pa, K].
COLD_STORE = {
    "suction_pressure": 2.0e5,
    "suction_temperature": 268.15,
    "discharge_pressure": 9.2e5,
    "discharge_temperature": 333.15,
    "liquid_temperature": 304.15,
}
BLEND_STORE = COLD_STORE | {"suction_pressure": 3.2e5, "discharge_pressure": 16.0e5}
TRANSCRITICAL = {
    "suction_pressure": 28e5,
    "suction_temperature": 273.15,
    "discharge_pressure": 92e5,
    "discharge_temperature": 368.15,
    "liquid_temperature": 308.15,
}
MACHINES = {"R-134a": COLD_STORE, "R-454C": BLEND_STORE, "R-448A": BLEND_STORE, "R-744": TRANSCRITICAL}
PAIRS = {
    "suction_pressure": 3.6e5,
    "suction_temperature": 275.0,
    "liquid_pressure": 15e5,
    "liquid_temperature": 302.0,
    "discharge_pressure": 15.4e5,
    "discharge_temperature": 350.0,
}


def reply(check: str, refrigerant: str, values: dict[str, Any], *, drawn: bool = True) -> dict[str, Any]:
    return perform(request(check, refrigerant, values, site=SITE, datum="iir", dress=SI, drawn=drawn))


def picture(check: str, refrigerant: str, values: dict[str, Any]) -> Picture:
    return Picture.from_plain(json.loads(json.dumps(reply(check, refrigerant, values)["picture"], allow_nan=False)))


@dataclass
class Read:
    """A drawing as a person reads it: where its marks stand by the numbers beside its axes."""

    drawing: Drawing

    def __post_init__(self) -> None:
        width = max(len(row) for row in self.drawing.rows)
        rows = [row.ljust(width) for row in self.drawing.rows]
        self.field = rows[1:-3]
        self.margin = min(row.index(next(c for c in row if c in "+|")) for row in self.field) + 1
        ticks = [(n, float(row[: self.margin - 1])) for n, row in enumerate(self.field) if row[self.margin - 1] == "+"]
        (self._top, high), (self._bottom, low) = ticks[0], ticks[-1]
        self._decades = math.log10(high / low) / (self._bottom - self._top)
        self._high = math.log10(high)
        columns = [n for n, c in enumerate(rows[-3]) if c == "+" and n >= self.margin]
        numbers = [(m.start() + (len(m[0]) - 1) / 2, float(m[0])) for m in re.finditer(r"-?[0-9.]+", rows[-2])]
        named = [(min(columns, key=lambda c, at=at: abs(c - at)), value) for at, value in numbers]
        (self._left, first), (right, last) = named[0], named[-1]
        self.per_column = (last - first) / (right - self._left)
        self._first = first
        self.pressures = [value for _, value in ticks]
        self.across = [value for _, value in named]

    @property
    def factor_per_row(self) -> float:
        return 10**self._decades

    def pressure(self, row: int) -> float:
        return 10 ** (self._high - (row - self._top) * self._decades)

    def value(self, column: int) -> float:
        return self._first + (column - self._left) * self.per_column

    def places(self) -> dict[str, tuple[int, int]]:
        """Return the row of the field and the column of every mark."""
        return {self.drawing.rows[row][column]: (row - 1, column) for row, column in self.drawing.marks}

    def cells(self, row: int) -> list[int]:
        """Return the columns of one row of the field that are not empty."""
        return [n for n, c in enumerate(self.field[row]) if n >= self.margin and c != " "]


# --- axes


def test_a_decade_is_as_long_as_any_other_and_ends_lie_on_the_ends() -> None:
    axis = Axis(0.1, 1000.0, 41, logarithmic=True)
    assert [axis.dot(v) for v in (0.1, 1.0, 10.0, 100.0, 1000.0)] == pytest.approx([0, 10, 20, 30, 40], abs=1e-9)
    assert axis.dot(2.0) - axis.dot(1.0) == pytest.approx(axis.dot(200.0) - axis.dot(100.0))
    assert Axis(-40.0, 60.0, 101).dot(10.0) == pytest.approx(50.0)


def test_ticks_are_one_two_five() -> None:
    assert sorted(logarithmic_ticks(0.5, 60.0)) == pytest.approx([0.5, 1, 2, 5, 10, 20, 50])
    # Where there is no room for all, whole decades are kept first.
    assert logarithmic_ticks(0.5, 60.0)[:2] == pytest.approx([1.0, 10.0])
    assert even_ticks(-31.0, 22.0, 6) == pytest.approx([-30, -20, -10, 0, 10, 20])
    assert even_ticks(130.0, 460.0, 8) == pytest.approx([150, 200, 250, 300, 350, 400, 450])


@given(st.floats(1e-6, 1e8), st.floats(1.5, 1e6))
def test_every_pressure_tick_is_a_one_a_two_or_a_five_and_none_is_left_out(low: float, ratio: float) -> None:
    found = sorted(logarithmic_ticks(low, low * ratio))
    mantissas = [round(v / 10 ** math.floor(math.log10(v) + 1e-9), 6) for v in found]
    assert set(mantissas) <= {1.0, 2.0, 5.0}
    assert all(b / a <= 2.5 + 1e-9 for a, b in pairwise(found))
    if found:
        assert found[0] / low <= 2.5 + 1e-9
        assert low * ratio / found[-1] <= 2.5 + 1e-9


@given(st.floats(-1e4, 1e4), st.floats(0.1, 1e5), st.integers(2, 12))
def test_even_ticks_are_even_and_no_more_than_asked_for(low: float, width: float, most: int) -> None:
    found = even_ticks(low, low + width, most)
    steps = {round((b - a) / width, 6) for a, b in pairwise(found)}
    assert len(found) <= most + 1
    assert len(steps) <= 1
    assert all(low - 1e-6 * width <= v <= low + width * (1 + 1e-6) for v in found)


def test_axes_are_named_in_the_readers_units() -> None:
    shown = picture("machine", "R-134a", COLD_STORE)
    for dress, pressure, enthalpy in (
        (SI, "pressure, bar abs", "specific enthalpy, kJ/kg"),
        (IP, "pressure, psi abs", "specific enthalpy, Btu/lb"),
    ):
        rows = draw(shown, 80, 18, dress, SITE).rows
        assert rows[0].startswith(pressure)
        assert rows[0].endswith("R-134a")
        assert rows[-1].strip() == enthalpy
    rows = draw(picture("superheat", "R-134a", PAIRS), 80, 18, IP, SITE).rows
    assert rows[-1].strip() == "temperature, °F"
    kilopascal = Dress(singles={Kind.PRESSURE: "kPa"})
    read = Read(draw(shown, 80, 18, kilopascal, SITE))
    assert read.drawing.rows[0].startswith("pressure, kPa abs")
    assert {200.0, 500.0, 1000.0, 2000.0} <= set(read.pressures)


# --- lines


def straight(ascii_alone: bool) -> Read:
    """One curve that is a straight line on a log scale: 1 bar at 0 °C to 100 bar at 100 °C."""
    curve = tuple((273.15 + t, 1e5 * 10 ** (t / 50)) for t in (0, 100))
    made = Picture(PictureKind.PRESSURE_TEMPERATURE, "R-000", {"bubble": curve}, None, (), ())
    return Read(draw(made, 80, 18, SI, SITE, ascii_alone=ascii_alone))


@pytest.mark.parametrize("ascii_alone", [False, True])
def test_a_straight_line_lands_on_its_cells(ascii_alone: bool) -> None:
    read = straight(ascii_alone)
    drawn = 0
    for row in range(len(read.field)):
        for column in read.cells(row):
            expected = 50 * math.log10(read.pressure(row))
            # A row of four dots spans this many degrees of the line; half of it to either side, and one column.
            reach = 50 * math.log10(read.factor_per_row) / 2 + 1.5 * read.per_column
            assert read.value(column) == pytest.approx(expected, abs=reach)
            drawn += 1
    columns = {column for row in range(len(read.field)) for column in read.cells(row)}
    assert len(columns) == max(columns) - min(columns) + 1, "the line has gaps"
    assert drawn >= 70


def test_braille_dots_of_a_level_line_are_two_a_cell_on_one_level() -> None:
    points = tuple(PicturePoint(str(n), "", 2e5, 273.15 + t) for n, t in ((1, 0.0), (2, 50.0)))
    curve = ((273.15, 1e5), (323.15, 4e5))
    level = ((273.15, 2e5), (323.15, 2e5))
    made = Picture(PictureKind.PRESSURE_TEMPERATURE, "R-000", {"bubble": curve, "dew": level}, None, points, ())
    read = Read(draw(made, 60, 16, SI, SITE))
    (row, left), (same, right) = read.places()["1"], read.places()["2"]
    assert row == same
    between = {ord(c) - 0x2800 for c in read.field[row][left + 1 : right]}
    # Every cell carries both dots of the level line (bits of the four levels), some also the rising curve's.
    level_bits = [bits for bits in (0x09, 0x12, 0x24, 0xC0) if all(cell & bits == bits for cell in between)]
    assert len(level_bits) == 1
    assert level_bits[0] in between


def test_lines_of_a_path_lean_the_way_they_run_in_ascii() -> None:
    read = Read(draw(picture("machine", "R-134a", COLD_STORE), 80, 18, SI, SITE, ascii_alone=True))
    places = read.places()
    (low, left), (high, right) = places["4"], places["3"]
    assert left == right
    assert {read.field[row][left] for row in range(high + 1, low)} == {"|"}
    (row, end) = places["2"]
    assert row == high
    assert set(read.field[row][right + 1 : end]) == {"-"}
    (start_row, start) = places["1"]
    rising = {read.field[r][c] for r in range(row + 1, start_row) for c in range(start + 1, end)} - {" ", "."}
    assert rising == {"/"}


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-454C", "R-744"])
def test_the_dome_is_where_the_fluid_has_its_bubble_and_dew_points(refrigerant: str) -> None:
    read = Read(draw(replace(picture("machine", refrigerant, MACHINES[refrigerant]), points=(), path=(), critical=None),
                     80, 18, SI, SITE, ascii_alone=True))  # fmt: skip
    fluid = open_fluid(find(refrigerant))
    compared = 0
    for row in range(len(read.field)):
        middle = read.pressure(row) * 1e5
        edges = [middle * read.factor_per_row**half for half in (-0.55, 0.55)]
        if edges[1] > 0.8 * fluid.critical_pressure:
            continue
        cells = read.cells(row)
        for side, seen in ((fluid.bubble_at_pressure, cells[:1]), (fluid.dew_at_pressure, cells[-1:])):
            try:
                ends = sorted(side(p).enthalpy / 1e3 for p in edges)
            except ValueError:
                continue  # Below the triple point there is neither.
            if seen:
                slack = 1.5 * read.per_column
                assert ends[0] - slack <= read.value(seen[0]) <= ends[1] + slack
                compared += 1
    assert compared >= 12


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-744", "R-717", "R-290", "R-32"])
def test_the_critical_enthalpy_is_good_to_the_width_of_a_character(refrigerant: str) -> None:
    """Against the equation of state itself, evaluated at its critical temperature and density."""
    from CoolProp import QT_INPUTS, AbstractState, DmassT_INPUTS

    state = AbstractState("HEOS", {"R-134a": "R134a", "R-744": "CO2", "R-717": "Ammonia", "R-290": "Propane",
                                   "R-32": "R32"}[refrigerant])  # fmt: skip
    state.update(QT_INPUTS, 0, 273.15)
    datum = state.hmass() - 200e3
    state.update(DmassT_INPUTS, state.rhomass_critical(), state.T_critical())
    values = TRANSCRITICAL if refrigerant == "R-744" else BLEND_STORE
    drawn = picture("component", refrigerant, {"component": "compressor", "inlet": {
        "pressure": values["suction_pressure"], "superheat": 5.0}})  # fmt: skip
    spots = [across for curve in drawn.curves.values() for across, _ in curve]
    assert drawn.critical is not None
    assert drawn.critical.enthalpy == pytest.approx(state.hmass() - datum, abs=(max(spots) - min(spots)) / 75)


def test_curves_of_a_blend_are_smooth_and_meet_at_the_critical_point() -> None:
    for refrigerant in ("R-454C", "R-448A", "R-470A"):
        shown = picture("machine", refrigerant, BLEND_STORE)
        bubble, dew = shown.curves["bubble"], shown.curves["dew"]
        assert bubble[-1] == dew[-1]
        assert shown.critical is not None
        assert bubble[-1] == (shown.critical.enthalpy, shown.critical.pressure)
        for curve in (bubble, dew):
            # Nearer to it the bubble curve of a wide-boiling blend may pass over the critical pressure (R-470A).
            logs = [math.log(p) for _, p in curve if p < 0.98 * shown.critical.pressure]
            assert logs == sorted(logs)
            assert max(b - a for a, b in pairwise(logs)) < 0.3
        assert [h for h, _ in bubble] == sorted(h for h, _ in bubble)


# --- points


@pytest.mark.parametrize("refrigerant", MACHINES)
@pytest.mark.parametrize("dress", [SI, IP])
@pytest.mark.parametrize("size", [(80, 18), (78, 16), (100, 30)])
def test_states_of_a_machine_are_read_back_from_the_picture(
    refrigerant: str, dress: Dress, size: tuple[int, int]
) -> None:
    shown = picture("machine", refrigerant, MACHINES[refrigerant])
    read = Read(draw(shown, *size, dress, SITE))
    places = read.places()
    assert set(places) == {"1", "2", "3", "4", "C"}
    bar, kilojoule = (1e5, 1e3) if dress is SI else (6894.757293168361, 2326.0)
    for point in (*shown.points, shown.critical):
        assert point is not None
        row, column = places[point.label]
        assert point.enthalpy is not None
        assert read.value(column) == pytest.approx(point.enthalpy / kilojoule, abs=1.6 * read.per_column)
        assert abs(math.log(read.pressure(row) * bar / point.pressure)) <= 1.3 * math.log(read.factor_per_row)


@pytest.mark.parametrize("refrigerant", MACHINES)
@pytest.mark.parametrize("ascii_alone", [False, True])
@pytest.mark.parametrize("size", SIZES)
def test_digits_stand_in_the_order_that_the_states_demand(
    refrigerant: str, ascii_alone: bool, size: tuple[int, int]
) -> None:
    shown = picture("machine", refrigerant, MACHINES[refrigerant])
    places = Read(draw(shown, *size, SI, SITE, ascii_alone=ascii_alone)).places()
    rows, columns = ({label: place[n] for label, place in places.items()} for n in (0, 1))
    assert min(columns["1"], columns["2"]) > max(columns["3"], columns["4"])
    assert columns["3"] == columns["4"]
    assert rows["2"] < rows["1"]
    assert rows["2"] == rows["3"] < rows["1"] == rows["4"]
    assert columns["2"] > columns["1"]
    if refrigerant == "R-744":
        assert rows["2"] <= rows["C"]
    else:
        assert rows["2"] > rows["C"]


def test_numbers_follow_the_flow_with_the_evaporators_outlet_last() -> None:
    shown = picture("machine", "R-134a", COLD_STORE | {"evaporator_outlet_temperature": 266.15})
    assert [(p.label, p.words) for p in shown.points] == [
        ("1", "suction"), ("2", "discharge"), ("3", "liquid"), ("4", "after valve"), ("5", "evaporator outlet")
    ]  # fmt: skip
    spots = [shown.spot(point) for point in shown.points]
    assert [line[0] for line in shown.path] == spots
    assert [line[-1] for line in shown.path] == [*spots[1:], spots[0]]


def test_a_state_that_is_missing_leaves_a_gap_in_the_path() -> None:
    values = {name: value for name, value in COLD_STORE.items() if name != "discharge_temperature"}
    shown = picture("machine", "R-134a", values)
    suction, liquid, valve = (shown.spot(point) for point in shown.points)
    assert [point.words for point in shown.points] == ["suction", "liquid", "after valve"]
    assert set(shown.path) == {(liquid, valve), (valve, suction)}


def test_points_that_fall_together_are_one_mark_and_named_in_the_legend() -> None:
    shown = picture("machine", "R-134a", COLD_STORE | {"evaporator_outlet_temperature": 268.05})
    drawing = draw(shown, 80, 18, SI, SITE)
    places = Read(drawing).places()
    assert set(places) == {"*", "2", "3", "4", "C"}
    assert "* 1 and 5 fall on one spot." in drawing.legend
    assert any(line.startswith("1 suction ") for line in drawing.legend)
    assert any(line.startswith("5 evaporator outlet ") for line in drawing.legend)


def test_legend_says_each_point_in_words_and_numbers() -> None:
    legend = draw(picture("machine", "R-134a", COLD_STORE), 80, 18, SI, SITE).legend
    enthalpies = {row[0]: row[3] for row in reply("machine", "R-134a", COLD_STORE)["answer"]["tables"][0]["rows"]}
    assert legend[0].split("  ")[0] == "1 suction"
    # 2.00 bar less the standard atmosphere of 1.01325 bar.
    assert "  -5.0 °C   0.99 bar g   2.00 bar abs" in legend[0]
    for line, (place, enthalpy) in zip(legend, enthalpies.items(), strict=False):
        assert place in line
        assert line.endswith(f"{enthalpy / 1e3:.2f} kJ/kg")
    assert legend[4].startswith("C critical point  101.1 °C")
    assert legend[5] == "Full line: bubble left, dew right, up to C. Dotted: from point to point."
    assert all(len(line) <= 80 for line in legend)


def test_legend_follows_the_readers_units_and_sense() -> None:
    shown = picture("machine", "R-134a", COLD_STORE)
    # 2.0 bar is 29.0 psi absolute; -5 °C is 23 °F.
    assert re.match(r"1 suction +23\.0 °F +14\.3 psi g +29\.0 psi abs +\d+\.\d\d Btu/lb", draw(shown, 80, 18, IP, SITE)
                    .legend[0])  # fmt: skip
    absolute = draw(shown, 80, 18, Dress(bare=Sense.ABSOLUTE), SITE).legend[0]
    assert absolute.index("2.00 bar abs") < absolute.index("0.99 bar g")
    high = draw(shown, 80, 18, SI, Site(80000.0, "barometer")).legend[0]
    assert "1.20 bar g" in high


# --- pressure-temperature


def test_superheat_is_the_distance_to_the_dew_curve_and_subcooling_to_the_bubble_curve() -> None:
    answered = reply("superheat", "R-454C", PAIRS)
    shown = Picture.from_plain(answered["picture"])
    found = answered["answer"]["findings"]
    assert [(p.label, p.words) for p in shown.points] == [
        ("1", "suction pipe"), ("2", "discharge pipe"), ("3", "liquid pipe")
    ]  # fmt: skip
    for line, length in zip(shown.path, ("superheat", "discharge_superheat", "subcooling"), strict=True):
        assert abs(line[1][0] - line[0][0]) == pytest.approx(found[length], abs=1e-9)
        assert line[0][1] == line[1][1]
    bare = replace(shown, path=())
    read = Read(draw(bare, 80, 18, SI, SITE, ascii_alone=True))
    places = read.places()
    row, column = places["1"]
    dew = max(c for c in read.cells(row) if c < column)
    assert (column - dew) * read.per_column == pytest.approx(found["superheat"], abs=2.5 * read.per_column)
    row, column = places["3"]
    curve = re.search(r"3 *(\.+)", read.field[row])
    assert curve is not None
    bubble = (curve.start(1) + curve.end(1) - 1) / 2
    assert (bubble - column) * read.per_column == pytest.approx(found["subcooling"], abs=2.5 * read.per_column)
    legend = draw(shown, 80, 18, SI, SITE).legend
    assert legend[0].endswith(f"superheat {found['superheat']:.1f} K")
    assert legend[2].endswith(f"subcooling {found['subcooling']:.1f} K")
    in_fahrenheit = draw(shown, 80, 18, IP, SITE).legend[0]
    assert in_fahrenheit.endswith(f"superheat {1.8 * found['superheat']:.1f} °F")


def test_the_dash_of_superheat_runs_from_the_curve_to_the_digit() -> None:
    shown = picture("superheat", "R-134a", {"suction_pressure": 2e5, "suction_temperature": 278.15})
    read = Read(draw(shown, 80, 18, SI, SITE, ascii_alone=True))
    row, column = read.places()["1"]
    dashes = re.search(r"(-+)1", read.field[row])
    assert dashes is not None
    # 5 °C less -10.1 °C, the dew point at 2 bar absolute (handbook tables of R-134a: -10.09 °C at 200 kPa).
    assert len(dashes[1]) * read.per_column == pytest.approx(15.1, abs=2 * read.per_column)
    assert dashes.end() == column + 1


def test_a_pressure_drop_moves_the_point_to_the_clamp() -> None:
    drops = {"suction_pressure_drop": 0.2e5, "liquid_pressure_drop": 0.5e5}
    points = picture("superheat", "R-134a", PAIRS | drops).points
    assert [p.pressure for p in points] == pytest.approx([3.8e5, 15.4e5, 14.5e5])


def test_a_pressure_alone_stands_on_its_curve_and_a_gas_cooler_without_one() -> None:
    (point,) = picture("superheat", "R-134a", {"liquid_pressure": 8e5}).points
    # 31.3 °C at 800 kPa: handbook tables of R-134a (31.31 °C).
    assert point.words == "liquid, bubble point"
    assert point.temperature == pytest.approx(273.15 + 31.31, abs=0.05)
    shown = picture("superheat", "R-744", {
        "suction_pressure": 28e5, "suction_temperature": 273.15,
        "discharge_pressure": 92e5, "discharge_temperature": 368.15,
    })  # fmt: skip
    assert [p.difference is None for p in shown.points] == [False, True]
    assert len(shown.path) == 1
    read = Read(draw(shown, 80, 18, SI, SITE))
    assert read.places()["2"][0] < read.places()["C"][0]


def test_saturation_is_one_point_of_a_pure_fluid_and_two_of_a_blend() -> None:
    pure = picture("saturation", "R-134a", {"reading": {"pressure": 8e5}})
    assert [p.words for p in pure.points] == ["bubble and dew"]
    at_pressure = picture("saturation", "R-454C", {"reading": {"pressure": 8e5}})
    read = Read(draw(at_pressure, 80, 18, SI, SITE))
    places = read.places()
    assert places["1"][0] == places["2"][0]
    glide = reply("saturation", "R-454C", {"reading": {"pressure": 8e5}})["answer"]["findings"]["glide"]
    assert (places["2"][1] - places["1"][1]) * read.per_column == pytest.approx(glide, abs=1.5 * read.per_column)
    at_temperature = picture("saturation", "R-454C", {"reading": {"temperature": 263.15}})
    places = Read(draw(at_temperature, 80, 18, SI, SITE)).places()
    assert places["1"][1] == places["2"][1]
    assert places["1"][0] < places["2"][0]


# --- components


def test_a_component_goes_from_inlet_to_outlet() -> None:
    values = {
        "component": "condenser",
        "inlet": {"pressure": 16e5, "temperature": 348.15},
        "outlet": {"pressure": 15.8e5, "subcooling": 4.0},
        "mass_flow": 0.14,
    }
    shown = picture("component", "R-407C", values)
    assert [(p.label, p.words) for p in shown.points] == [("1", "inlet"), ("2", "outlet")]
    assert shown.path == ((shown.spot(shown.points[0]), shown.spot(shown.points[1])),)
    places = Read(draw(shown, 80, 18, SI, SITE)).places()
    assert places["2"][1] < places["1"][1]


def test_both_streams_of_a_liquid_suction_exchanger_are_drawn() -> None:
    values = {
        "component": "liquid-suction",
        "inlet": {"pressure": 10e5, "temperature": 308.15},
        "outlet": {"pressure": 10e5, "temperature": 298.15},
        "suction_inlet": {"pressure": 2e5, "temperature": 268.15},
    }
    shown = picture("component", "R-134a", values)
    assert [p.words for p in shown.points] == ["liquid inlet", "liquid outlet", "suction inlet", "suction outlet"]
    assert shown.points[3].pressure == pytest.approx(2e5)
    assert len(shown.path) == 2
    places = Read(draw(shown, 80, 18, SI, SITE)).places()
    assert places["2"][1] < places["1"][1] < places["3"][1] < places["4"][1]


# --- both alphabets, every size, every number


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("refrigerant", MACHINES)
def test_ascii_has_the_same_size_and_marks_and_no_other_character(refrigerant: str, size: tuple[int, int]) -> None:
    for shown in (
        picture("machine", refrigerant, MACHINES[refrigerant]),
        picture("superheat", refrigerant, MACHINES[refrigerant]),
    ):
        braille, plain = (draw(shown, *size, SI, SITE, ascii_alone=alone) for alone in (False, True))
        assert max(ord(c) for line in plain.lines() for c in line) <= 126
        assert braille.marks == plain.marks
        assert Read(braille).places() == Read(plain).places()
        for drawing in (braille, plain):
            assert len(drawing.rows) == size[1]
            assert all(len(line) <= size[0] for line in drawing.lines())
            assert not any(c in line for line in drawing.lines() for c in "\t\n\x1b")
        assert Read(braille).pressures == Read(plain).pressures
        assert Read(braille).across == Read(plain).across


def test_braille_cells_are_braille_or_marks() -> None:
    drawing = draw(picture("machine", "R-454C", BLEND_STORE), 80, 18, SI, SITE)
    margin = Read(drawing).margin
    characters = {c for row in drawing.rows[1:-3] for c in row[margin:]}
    assert all(c in " 1234C" or 0x2800 < ord(c) <= 0x28FF for c in characters)


@pytest.mark.parametrize("size", [(0, 0), (1, 1), (29, 18), (80, 7), (-5, 3), (30, 8)])
def test_a_field_too_small_says_so_and_keeps_the_legend(size: tuple[int, int]) -> None:
    drawing = draw(picture("machine", "R-134a", COLD_STORE), *size, SI, SITE)
    if size == (30, 8):
        assert set(Read(drawing).places()) >= {"2", "3"}
    else:
        assert drawing.rows == ("A picture needs 30 x 8 characters.",)
        assert not drawing.marks
    assert "1 suction" in " ".join(drawing.legend)


def test_no_dome_one_point_and_no_number_at_all() -> None:
    point = PicturePoint("1", "somewhere", 2e5, 280.0, 4e5)
    lone = Picture(PictureKind.PRESSURE_ENTHALPY, "R-000", {}, None, (point,), ())
    drawing = draw(lone, 80, 18, SI, SITE)
    assert [drawing.rows[row][column] for row, column in drawing.marks] == ["1"]
    unknown = replace(lone, points=(replace(point, enthalpy=math.nan),))
    assert draw(unknown, 80, 18, SI, SITE).rows == ("Nothing to draw.",)
    assert draw(replace(lone, points=()), 80, 18, SI, SITE).rows == ("Nothing to draw.",)


def test_a_point_far_off_is_named_and_does_not_shrink_the_rest() -> None:
    shown = picture("machine", "R-134a", COLD_STORE)
    far = PicturePoint("5", "a slip of the pen", 2e5, 280.0, 9e8)
    drawing = draw(replace(shown, points=(*shown.points, far)), 80, 18, SI, SITE)
    assert set(Read(drawing).places()) == {"1", "2", "3", "4", "C"}
    assert "Outside the picture: 5." in drawing.legend


ANY = st.floats(allow_nan=True, allow_infinity=True)
POINTS = st.builds(
    PicturePoint,
    label=st.sampled_from("123456789"),
    words=st.sampled_from(["suction", "after valve"]),
    pressure=ANY,
    temperature=st.none() | ANY,
    enthalpy=st.none() | ANY,
    difference=st.none() | st.tuples(st.just("superheat"), ANY),
)
SPOTS = st.lists(st.tuples(ANY, ANY), max_size=4).map(tuple)


@given(
    st.sampled_from(PictureKind),
    st.lists(POINTS, max_size=6),
    st.lists(SPOTS, max_size=4),
    st.dictionaries(st.sampled_from(["bubble", "dew"]), SPOTS),
    st.integers(-3, 120),
    st.integers(-3, 50),
    st.sampled_from([SI, IP, Dress(singles={Kind.PRESSURE: "Pa", Kind.SPECIFIC_ENTHALPY: "J/kg"})]),
    st.booleans(),
)
def test_no_number_makes_drawing_fail(
    kind: PictureKind,
    points: list[PicturePoint],
    path: list[tuple[tuple[float, float], ...]],
    curves: dict[str, tuple[tuple[float, float], ...]],
    width: int,
    height: int,
    dress: Dress,
    ascii_alone: bool,
) -> None:
    made = Picture(kind, "R-000", curves, points[0] if points else None, tuple(points), tuple(path))
    drawing = draw(made, width, height, dress, SITE, ascii_alone=ascii_alone)
    assert len(drawing.rows) in (1, height)
    if len(drawing.rows) > 1:
        assert all(len(row) <= width for row in drawing.rows)
        assert all(drawing.rows[row][column] in "123456789*" for row, column in drawing.marks)


@given(st.floats(1e4, 9e6), st.floats(230.0, 420.0), st.floats(230.0, 420.0), st.sampled_from(["R-134a", "R-744"]))
def test_whatever_a_machine_reads_can_be_drawn(
    pressure: float, suction: float, liquid: float, refrigerant: str
) -> None:
    values = {
        "suction_pressure": pressure,
        "suction_temperature": suction,
        "discharge_pressure": 2.5 * pressure,
        "liquid_temperature": liquid,
    }
    answered = reply("machine", refrigerant, values)
    assume(answered.get("picture") is not None)
    drawing = draw(Picture.from_plain(answered["picture"]), 80, 18, SI, SITE)
    assert len(drawing.rows) == 18
    assert drawing.marks
    assert not any(line.startswith("Outside") for line in drawing.legend)


# --- what carries a picture


def test_a_picture_goes_through_json_and_comes_back_the_same() -> None:
    plain = reply("superheat", "R-454C", PAIRS)["picture"]
    assert Picture.from_plain(json.loads(json.dumps(plain, allow_nan=False))).plain() == plain


def test_a_picture_comes_only_when_asked_for_and_leaves_the_answer_alone() -> None:
    without = reply("machine", "R-134a", COLD_STORE, drawn=False)
    assert set(without) == {"answer"}
    assert reply("machine", "R-134a", COLD_STORE)["answer"] == without["answer"]
    assert reply("machine", "R-134a", {"space_temperature": 270.0, "sink_temperature": 300.0})["picture"] is None


def test_the_frame_keeps_still_while_a_reading_is_typed() -> None:
    first, second = (picture("machine", "R-134a", COLD_STORE | {"suction_pressure": p}) for p in (2.0e5, 2.03e5))
    assert first.curves == second.curves


def test_one_shot_prints_the_picture_below_the_sheet(capsys: pytest.CaptureFixture[str]) -> None:
    words = ["machine", "R-134a", "--suction-pressure", "2 bar abs", "--suction-temperature", "-5 C",
             "--discharge-pressure", "9.2 bar abs", "--discharge-temperature", "60 C", "--liquid-temperature", "31 C",
             "--picture"]  # fmt: skip
    assert main(words) == 0
    text = capsys.readouterr().out
    expected = draw(picture("machine", "R-134a", COLD_STORE), 80, 18, SI, SITE)
    assert text.index("states around the circuit") < text.index("pressure, bar abs, log scale")
    assert [line.rstrip() for line in text.splitlines()[-len(expected.lines()) :]][:5] == expected.lines()[:5]
    assert main([*words, "--ascii"]) == 0
    text = capsys.readouterr().out
    assert text.isascii()
    assert "Dots: bubble left, dew right, up to C. Dashes: from point to point." in text
    assert main([*words, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert [p["words"] for p in document["picture"]["points"]] == ["suction", "discharge", "liquid", "after valve"]
    assert document["picture"]["units"]["across"] == "J/kg"
    assert set(document["picture"]["curves"]) == {"bubble", "dew"}
    assert main(words[:-1]) == 0
    assert "log scale" not in capsys.readouterr().out


def test_one_shot_says_when_there_is_nothing_to_draw(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["machine", "R-134a", "--space-temperature", "-20 C", "--sink-temperature", "30 C", "--picture"]) == 0
    assert "No picture: no point has both its coordinates." in capsys.readouterr().out
