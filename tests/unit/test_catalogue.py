"""The catalogue: what it holds, how a person's spelling finds it, what a user may add."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.errors import NotModelled, UnknownRefrigerant
from gaugeside.refrigerants import all_refrigerants, find, library, load_own, open_fluid, search
from gaugeside.refrigerants.catalogue import catalogue
from gaugeside.refrigerants.own import FILE

PURE = (
    "R-22",
    "R-23",
    "R-32",
    "R-41",
    "R-123",
    "R-124",
    "R-125",
    "R-134a",
    "R-143a",
    "R-152a",
    "R-227ea",
    "R-236fa",
    "R-245fa",
    "R-1233zd(E)",
    "R-1234yf",
    "R-1234ze(E)",
    "R-1270",
    "R-170",
    "R-290",
    "R-600",
    "R-600a",
    "R-717",
    "R-718",
    "R-744",
)
BLENDS = (
    "R-404A",
    "R-407A",
    "R-407C",
    "R-407F",
    "R-407H",
    "R-410A",
    "R-417A",
    "R-422D",
    "R-427A",
    "R-442A",
    "R-448A",
    "R-449A",
    "R-450A",
    "R-452A",
    "R-452B",
    "R-454A",
    "R-454B",
    "R-454C",
    "R-455A",
    "R-466A",
    "R-502",
    "R-507A",
    "R-513A",
    "R-513B",
    "R-515A",
    "R-515B",
    "R-516A",
)


@pytest.fixture(autouse=True)
def _fresh_catalogue() -> Iterator[None]:
    yield
    catalogue.cache_clear()


def test_the_refrigerants_of_the_trade_are_there_and_modelled() -> None:
    for designation in PURE + BLENDS:
        assert find(designation).designation == designation
        assert find(designation).modelled
    assert sum(one.modelled for one in all_refrigerants()) >= 120


@pytest.mark.parametrize(
    ("typed", "designation"),
    [
        ("134a", "R-134a"),
        ("r134A", "R-134a"),
        ("R 134a", "R-134a"),
        ("R134a", "R-134a"),
        (" r-134a ", "R-134a"),
        ("HFC-134a", "R-134a"),
        ("HFO-1234yf", "R-1234yf"),
        ("R-1234ze(E)", "R-1234ze(E)"),
        ("1234zeE", "R-1234ze(E)"),
        ("1234ze(e)", "R-1234ze(E)"),
        ("r1234ze e", "R-1234ze(E)"),
        ("1233zd e", "R-1233zd(E)"),
        ("CO2", "R-744"),
        ("co2", "R-744"),
        ("Carbon Dioxide", "R-744"),
        ("ammonia", "R-717"),
        ("NH3", "R-717"),
        ("propane", "R-290"),
        ("isobutane", "R-600a"),
        ("n-butane", "R-600"),
        ("propylene", "R-1270"),
        ("water", "R-718"),
        ("448a", "R-448A"),
        ("R448A", "R-448A"),
        ("r 407 c", "R-407C"),
        ("454-B", "R-454B"),
        ("401a", "R-401A"),
        ("RC318", "R-C318"),
        ("c318", "R-C318"),
        ("E170", "R-E170"),
        ("r-744a", "R-744A"),
    ],
)
def test_every_usual_spelling_finds_its_refrigerant(typed: str, designation: str) -> None:
    assert find(typed).designation == designation


def test_each_designation_and_each_name_finds_its_own_and_no_other() -> None:
    for one in all_refrigerants():
        for name in (one.designation, *one.names):
            for spelling in (name, name.lower(), name.upper(), name.replace("-", ""), name.replace("-", " ")):
                assert find(spelling).designation == one.designation, spelling


@pytest.mark.parametrize(
    ("typed", "offered"), [("R-410", "R-410A"), ("R-449D", "R-449A"), ("R-1234", "R-1234yf"), ("amonia", "R-717")]
)
def test_an_unknown_one_is_refused_and_the_nearest_offered(typed: str, offered: str) -> None:
    with pytest.raises(UnknownRefrigerant) as refusal:
        find(typed)
    assert offered in refusal.value.hint
    assert typed in refusal.value.message


@pytest.mark.parametrize("typed", ["", "   ", "---", "R134a\n", "\x1b[2J", "x" * 10_000, "\x00"])
def test_nonsense_is_refused_without_echoing_it(typed: str) -> None:
    with pytest.raises(UnknownRefrigerant) as refusal:
        find(typed)
    assert len(refusal.value.sentence()) < 200
    assert refusal.value.sentence().isprintable()


@settings(max_examples=150, deadline=None)
@given(st.text(max_size=80))
def test_any_text_finds_one_or_is_refused(text: str) -> None:
    try:
        answer = find(text).designation
    except UnknownRefrigerant as refusal:
        answer = refusal.sentence()
    assert answer in catalogue().by_designation or ("." in answer and answer.isprintable())
    assert isinstance(search(text), list)


def test_a_blend_without_a_mixing_model_is_found_and_says_why() -> None:
    one = find("R-401A")
    assert not one.modelled
    assert one.composition == (("R-22", 0.53), ("R-152a", 0.13), ("R-124", 0.34))
    assert "mixing" in one.reason
    with pytest.raises(NotModelled, match="R-401A"):
        open_fluid(one)
    assert all(other.reason for other in all_refrigerants() if not other.modelled)


def test_search_puts_the_best_first() -> None:
    assert search("410a")[0].designation == "R-410A"
    assert search("454")[:3] == [find("R-454A"), find("R-454B"), find("R-454C")]
    assert search("propane")[0].designation == "R-290"
    assert search("ammo")[0].designation == "R-717"
    assert search("32")[0].designation == "R-32"
    assert find("R-454C") in search("1234yf")  # by its component
    assert search("xyz") == []


def test_everything_in_natural_order_of_the_numbers() -> None:
    listed = [one.designation for one in search("")]
    assert listed == [one.designation for one in all_refrigerants()]
    assert listed.index("R-22") < listed.index("R-134a") < listed.index("R-404A") < listed.index("R-1234yf")


def test_compositions_are_those_of_the_property_library() -> None:
    """The library's list of blends is that of ASHRAE 34; the catalogue carries it in mass per cent."""
    for one in all_refrigerants():
        assert sum(share for _, share in one.composition) == pytest.approx(1.0, abs=1e-9), one.designation
        if one.library_fluid.endswith(".mix"):
            state = library.open_state(one.library_fluid)
            fluids = [find(name).library_fluid for name, _ in one.composition]
            carried = dict(zip(fluids, (share for _, share in one.composition), strict=True))
            listed = dict(zip(state.fluid_names(), state.get_mass_fractions(), strict=True))
            assert {k.upper(): v for k, v in carried.items()} == pytest.approx(
                {k.upper(): v for k, v in listed.items()}, abs=1e-6
            ), one.designation


@pytest.mark.parametrize(
    ("designation", "shares"),
    [
        ("R-404A", {"R-125": 44, "R-143a": 52, "R-134a": 4}),
        ("R-407C", {"R-32": 23, "R-125": 25, "R-134a": 52}),
        ("R-410A", {"R-32": 50, "R-125": 50}),
        ("R-448A", {"R-32": 26, "R-125": 26, "R-1234yf": 20, "R-134a": 21, "R-1234ze(E)": 7}),
        ("R-449A", {"R-32": 24.3, "R-125": 24.7, "R-1234yf": 25.3, "R-134a": 25.7}),
        ("R-454B", {"R-32": 68.9, "R-1234yf": 31.1}),
        ("R-454C", {"R-32": 21.5, "R-1234yf": 78.5}),
        ("R-455A", {"R-744": 3, "R-32": 21.5, "R-1234yf": 75.5}),
        ("R-513A", {"R-1234yf": 56, "R-134a": 44}),
    ],
)
def test_compositions_by_mass_per_cent(designation: str, shares: dict[str, float]) -> None:
    """ASHRAE 34, mass per cent."""
    assert {name: 100 * share for name, share in find(designation).composition} == pytest.approx(shares)


@pytest.mark.parametrize(
    ("designation", "gwp"),
    [
        # 100 years, IPCC AR4, by mass from the components; as printed in Regulation (EU) 517/2014 practice.
        ("R-32", 675),
        ("R-125", 3500),
        ("R-134a", 1430),
        ("R-143a", 4470),
        ("R-22", 1810),
        ("R-744", 1),
        ("R-404A", 3922),
        ("R-407C", 1774),
        ("R-410A", 2088),
        ("R-407F", 1825),
        ("R-448A", 1387),
        ("R-449A", 1397),
        ("R-452A", 2140),
        ("R-454B", 466),
        ("R-454C", 148),
        ("R-455A", 148),
        ("R-507A", 3985),
        ("R-513A", 631),
    ],
)
def test_global_warming_potential(designation: str, gwp: float) -> None:
    one = find(designation)
    # Published figures are rounded to whole numbers, some from components rounded before.
    assert one.gwp == pytest.approx(gwp, abs=1.0)
    assert "AR4" in one.gwp_source


def test_a_potential_that_is_not_known_is_left_out() -> None:
    assert find("R-1132(E)").gwp is None
    assert find("R-474A").gwp is None
    assert find("R-474A").gwp_source == ""


@pytest.mark.parametrize(
    ("safety_class", "designations"),
    [
        # ASHRAE 34 / ISO 817; from memory where the catalogue's header says so.
        ("A1", "R-22 R-125 R-134a R-404A R-407C R-410A R-448A R-449A R-450A R-452A R-507A R-513A R-744 R-718"),
        ("A2L", "R-32 R-143a R-1234yf R-1234ze(E) R-452B R-454A R-454B R-454C R-455A"),
        ("A3", "R-290 R-600a R-1270"),
        ("B2L", "R-717"),
        ("B1", "R-123"),
    ],
)
def test_safety_classes(safety_class: str, designations: str) -> None:
    for designation in designations.split():
        one = find(designation)
        assert one.safety_class == safety_class
        assert one.flammable is (safety_class[1:] in ("2L", "2", "3"))
        assert one.toxic is safety_class.startswith("B")


def test_an_unknown_class_claims_nothing() -> None:
    one = find("R-41")
    assert one.safety_class == ""
    assert one.flammable is None
    assert one.toxic is None


def test_each_model_says_how_sure_it_is() -> None:
    for one in all_refrigerants():
        if one.modelled:
            assert 0.0 < one.model_uncertainty <= 1.0
            assert len(one.model_uncertainty_reason) > 20
            assert one.critical_temperature > one.minimum_temperature > 0.0
    assert 0.3 <= find("R-448A").model_uncertainty <= 0.6
    assert find("R-454C").model_uncertainty == pytest.approx(0.6)
    assert find("R-407C").model_uncertainty < 0.2


def test_nature() -> None:
    assert find("R-134a").nature == "pure"
    assert find("R-507A").nature == "azeotrope"
    assert find("R-407C").nature == "zeotrope"


# --- the file of a user's own


def own(folder: Path, text: str) -> list[str]:
    (folder / FILE).write_text(text, encoding="utf-8")
    return load_own(folder)


def test_own_blend_and_local_names(tmp_path: Path) -> None:
    problems = own(
        tmp_path,
        """
        [names]
        "plant gas" = "R-454C"
        [blends."Site mix 1"]
        composition = { "R-32" = 0.3, "1234yf" = 0.7 }
        names = ["mix one"]
        class = "A2L"
        """,
    )
    assert problems == []
    assert find("PLANT GAS").designation == "R-454C"
    mine = find("mixone")
    assert mine.designation == "Site mix 1"
    assert mine.composition == (("R-32", 0.3), ("R-1234yf", 0.7))
    assert mine.gwp == pytest.approx(0.3 * 675 + 0.7 * 4)
    assert mine.own
    assert mine.flammable
    assert mine in search("site")
    assert all_refrigerants()[-1] == mine
    assert load_own(tmp_path) == []  # reading the file again is no quarrel with itself


def test_own_blend_equal_to_a_shipped_one_has_its_properties(tmp_path: Path) -> None:
    own(tmp_path, '[blends.mine]\ncomposition = { "R-32" = 0.689, "R-1234yf" = 0.311 }')
    mine, shipped = open_fluid(find("mine")), open_fluid(find("R-454B"))
    for temperature in (233.15, 273.15, 330.15):
        assert mine.bubble_at_temperature(temperature).pressure == pytest.approx(
            shipped.bubble_at_temperature(temperature).pressure,
            rel=1e-7,  # where the solver stops
        )
    # Followed along the bubble curve instead of searched for; the difference is far below the model's own error.
    assert mine.critical_temperature == pytest.approx(shipped.critical_temperature, abs=0.1)
    assert mine.critical_pressure == pytest.approx(shipped.critical_pressure, rel=5e-3)


@pytest.mark.parametrize(
    ("text", "word"),
    [
        ('[blends.R-134a]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }', "already means R-134a"),
        ('[blends."134 A"]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }', "already means R-134a"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "R-125" = 0.4 }', "sum to 0.9"),
        ('[blends.x]\ncomposition = { "R-32" = 1.5, "R-125" = -0.5 }', "between 0 and 1"),
        ('[blends.x]\ncomposition = { "R-32" = nan, "R-125" = 0.5 }', "between 0 and 1"),
        ('[blends.x]\ncomposition = { "R-32" = true, "R-125" = 0.5 }', "between 0 and 1"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "R-999" = 0.5 }', "R-999"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "R-410A" = 0.5 }', "R-410A is not a pure fluid"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "r32" = 0.5 }', "R-32 twice"),
        ('[blends.x]\ncomposition = { "R-32" = 1.0 }', "2 to 8"),
        ("[blends.x]\ncomposition = 3", "2 to 8"),
        ("[blends]\nx = 3", "must be a table"),
        ("blends = 3", "must be a table"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }\nclass = "Z9"', "class"),
        ('[blends.x]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }\ncolour = "red"', "colour"),
        ('[blends."a\\u001bb"]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }', "control characters"),
        ('[names]\n"" = "R-22"', "letter or digit"),
        ('[names]\n"gas" = "R-9999"', "R-9999"),
        ('[names]\n"gas" = 3', "in quotes"),
        ('[names]\n"CO2" = "R-22"', "already means R-744"),
        (f'[names]\n"{"x" * 61}" = "R-22"', "60 characters"),
        ("colour = 1", "colour"),
        ("not toml at all [", "could not be read"),
    ],
)
def test_a_bad_entry_is_told_and_left_out(tmp_path: Path, text: str, word: str) -> None:
    before = len(all_refrigerants())
    problems = own(tmp_path, text)
    assert len(problems) == 1
    assert word in problems[0]
    assert problems[0].isprintable()
    assert len(all_refrigerants()) == before


def test_a_bad_file_never_stops_the_start(tmp_path: Path) -> None:
    assert load_own(tmp_path) == []
    (tmp_path / FILE).write_bytes(b"\xff\xfe\x00")
    assert "could not be read" in load_own(tmp_path)[0]
    (tmp_path / FILE).write_bytes(b"#" * 300_000)
    assert "larger" in load_own(tmp_path)[0]
    assert find("R-22").designation == "R-22"


def test_a_blend_no_model_exists_for_is_refused_when_opened(tmp_path: Path) -> None:
    assert own(tmp_path, '[blends.odd]\ncomposition = { "R-717" = 0.4, "R-E170" = 0.6 }') == []
    with pytest.raises(NotModelled, match="mixing model"):
        open_fluid(find("odd"))


# --- what a fresh process loads and prints


def fresh(code: str, **options: object) -> subprocess.CompletedProcess[str]:
    # Without PYTHONUNBUFFERED, which would also switch off the buffers of C that this is about.
    environment = {k: v for k, v in os.environ.items() if not k.startswith(("COOLPROP", "PYTHON"))}
    return subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        timeout=60,
        env=environment,
        check=False,
        **options,
    )  # type: ignore[call-overload, no-any-return]


def test_the_catalogue_alone_loads_no_property_library() -> None:
    ran = fresh(
        "import sys; from gaugeside.refrigerants import find, search; find('R-448A'); search('32');"
        "print(any(m.split('.')[0] in ('CoolProp', 'textual', 'rich', 'pint') for m in sys.modules))"
    )
    assert ran.stdout == "False\n", ran.stderr


def test_the_property_library_prints_nothing() -> None:
    code = "from gaugeside.refrigerants import find, open_fluid; open_fluid(find('R-134a'))"
    ran = fresh(code + "; print('answer', flush=True)")
    assert (ran.returncode, ran.stdout, ran.stderr) == (0, "answer\n", "")


def test_it_also_loads_with_standard_output_closed() -> None:
    code = "import os; os.close(1); from gaugeside.refrigerants import find, open_fluid; open_fluid(find('R-134a'))"
    ran = fresh(code + "; os.write(2, b'fine'); os._exit(0)")
    assert (ran.returncode, ran.stderr) == (0, "fine")
