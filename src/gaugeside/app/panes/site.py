"""The site's pane: atmosphere, units, what a bare pressure is, enthalpy datum, theme."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any, cast

from textual import events, on
from textual.app import ComposeResult
from textual.containers import VerticalScroll
from textual.widget import Widget
from textual.widgets import Input

from gaugeside.app.help_text import SITE
from gaugeside.app.widgets.field import ChoiceField, FieldLine, TextField
from gaugeside.app.widgets.lines import CAUTION, MUTED, RULE, Line
from gaugeside.errors import Refusal
from gaugeside.preferences import dress_of, read_site, site_source
from gaugeside.quantities import CHOOSABLE, Dress, Kind, bare_labels, is_vacuum_to_some, quoted
from gaugeside.refrigerants import Datum
from gaugeside.settings import Settings

if TYPE_CHECKING:
    from gaugeside.app.house import House

_SHORT = {Kind.TEMPERATURE_DIFFERENCE: "temp. difference"}
_FROM = {"sea level": "standard atmosphere", "altitude": "standard atmosphere", "barometer": "as read"}
_ZERO = {
    Datum.IIR: "200 kJ/kg, liquid at 0 °C",
    Datum.ASHRAE: "0 kJ/kg, liquid at -40 °C",
    Datum.NBP: "0 kJ/kg, liquid at 101.325 kPa",
}


class SitePane(VerticalScroll, can_focus=False):
    """The pane of the settings."""

    def __init__(self, settings: Settings, themes: tuple[str, ...]) -> None:
        super().__init__(id="pane-site", classes="pane")
        self._lines: dict[str, FieldLine] = {}
        self._site = FieldLine(
            "site_pressure", SITE["site_pressure"][0], TextField(settings.site_pressure_text, id="site_pressure")
        )
        self._choice("dress", SITE["dress"][0], ("si", "ip"), settings.dress)
        dress = dress_of(settings)
        for kind in CHOOSABLE:
            chosen = dress.unit(kind).label
            self._choice(f"unit-{kind.name}", f" {_SHORT.get(kind, kind.value)}", bare_labels(kind), chosen)
        self._choice("bare_pressure", SITE["bare_pressure"][0], ("gauge", "absolute"), settings.bare_pressure)
        self._choice("datum", SITE["datum"][0], tuple(Datum), settings.datum)
        self._choice("theme", SITE["theme"][0], themes, settings.theme)

    def _choice(self, name: str, label: str, choices: tuple[str, ...], value: str) -> None:
        self._lines[name] = FieldLine(name, label, ChoiceField([str(c) for c in choices], value, id=name))

    @property
    def house(self) -> House:
        """The app, by its own type."""
        return cast("House", self.app)

    def compose(self) -> ComposeResult:
        """One line a setting."""
        yield Line(f"{'setting':<20}{'as typed or chosen':<21}understood", MUTED)
        yield self._site
        yield from self._lines.values()
        yield Line(RULE, MUTED, classes="rule")
        yield Line("Left, Right or a first letter change a choice. It counts at once.", MUTED)
        yield Line(f"Settings: {self.house.places.settings_file}", MUTED)
        yield Line(f"Logbook:  {self.house.places.logbook_file}", MUTED)

    def on_mount(self) -> None:
        """Say what each setting means."""
        self._explain()

    def first_field(self) -> Widget:
        """The field the cursor starts in."""
        return self._site.field

    @on(Input.Changed)
    def _typed(self, event: Input.Changed) -> None:
        event.stop()
        text = event.value.strip()
        house = self.house
        try:
            source = site_source(text)
            if text:
                read_site(text, source, house.dress)
        except Refusal as refusal:
            self._site.understood.say("? not understood, see below", CAUTION)
            house.say(refusal.sentence(), CAUTION)
            return
        house.apply(replace(house.settings, site_pressure_text=text, site_pressure_from=source))
        self._explain()
        house.say("", MUTED)

    @on(ChoiceField.Changed)
    def _chosen(self, event: ChoiceField.Changed) -> None:
        event.stop()
        name, value = str(event.field.id), event.value
        house = self.house
        settings = house.settings
        if name == "dress":
            settings = replace(settings, dress=cast(Any, value), units={})
            self._dressed(settings)
        elif name.startswith("unit-"):
            kind = next(kind for kind in CHOOSABLE if f"unit-{kind.name}" == name)
            units = {key: label for key, label in settings.units.items() if key != kind.value}
            if value != Dress(settings.dress).unit(kind).label:
                units[kind.value] = value
            settings = replace(settings, units=units)
        else:
            settings = replace(settings, **cast(dict[str, Any], {name: value}))
        house.apply(settings)
        self._explain()

    def _dressed(self, settings: Settings) -> None:
        dress = dress_of(settings)
        for kind in CHOOSABLE:
            cast(ChoiceField, self._lines[f"unit-{kind.name}"].field).value = dress.unit(kind).label

    def _explain(self) -> None:
        house = self.house
        where = _FROM[house.settings.site_pressure_from]
        self._site.understood.say(f"{house.site.atmosphere / 1000:.2f} kPa abs, {where}")
        pressure = house.dress.unit(Kind.PRESSURE)
        bare = f"12 {pressure.label} is read as {house.settings.bare_pressure}"
        if house.settings.bare_pressure == "gauge" and is_vacuum_to_some(pressure):
            bare = f"{pressure.label} is refused without vac, g or abs"
        words = {
            "dress": {"si": "SI: bar, °C, kg/s, kW", "ip": "inch-pound: psi, °F, lb/h, Btu/h"}[house.settings.dress],
            "bare_pressure": bare,
            "datum": _ZERO[Datum(house.settings.datum)],
        }
        for name, text in words.items():
            self._lines[name].understood.say(text)
        self._explain_theme()

    def _explain_theme(self) -> None:
        wanted, used = self.house.settings.theme, self.house.theme
        line = self._lines["theme"]
        if wanted not in self.house.themes:
            cast(ChoiceField, line.field).value = used
            line.understood.say(f"{quoted(wanted)} is not there", CAUTION)
        else:
            line.understood.say("" if used == wanted else f"this terminal shows {used}")

    def on_descendant_focus(self, event: events.DescendantFocus) -> None:
        """Say what the setting means."""
        name = str(event.widget.id)
        words = SITE[name][1] if name in SITE else "Which unit readings of this kind are shown in."
        settings = self.house.settings
        if name == "datum":
            words = f"{Datum(settings.datum).description}. {words}"
        if name == "theme" and settings.theme not in self.house.themes:
            used = self.house.theme
            words = f"The theme {quoted(settings.theme)} named in the settings is not there; {used} is used. {words}"
        self.house.say(words)

    @on(Input.Submitted)
    @on(ChoiceField.Submitted)
    def _enter(self, event: Any) -> None:
        event.stop()
        self.app.action_focus_next()
