"""From a calculation to the logbook entry that holds it."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Any

from gaugeside import __version__
from gaugeside.checks.sheet import Answer, Check, si_unit
from gaugeside.checks.typed import TypedLine
from gaugeside.checks.view import sentence, two_forms
from gaugeside.errors import Refusal
from gaugeside.logbook import Entry, Logbook
from gaugeside.quantities import Dress, Site
from gaugeside.settings import Settings


def entry_of(
    check: Check,
    answer: Answer,
    typed: Mapping[str, TypedLine],
    settings: Settings,
    dress: Dress,
    site: Site,
    note: str,
) -> Entry:
    """Return the entry for one answered calculation: readings as typed, SI values, findings, what they rest on."""
    values: dict[str, float] = {}
    for name, line in typed.items():
        if isinstance(line.value, float | int):
            values[name] = float(line.value)
        elif isinstance(line.value, Mapping):
            values.update({f"{name}.{prop}": float(number) for prop, number in line.value.items()})
    return Entry(
        number=None,
        kept_at=datetime.now(UTC),
        check=check.name,
        refrigerant=answer.refrigerant,
        tag=settings.tag,
        note=note,
        readings={name: line.complete for name, line in typed.items() if line.complete},
        options={
            "site pressure": f"{site.atmosphere:.6g} Pa",
            "site": site.source,
            "site pressure from": settings.site_pressure_from,
            "site pressure text": settings.site_pressure_text,
            "bare pressure": settings.bare_pressure,
            "datum": settings.datum,
            "dress": settings.dress,
        },
        values=values,
        findings=json_findings(check, answer),
        notes=[sentence(remark, dress, site) for remark in answer.notes],
        cautions=[sentence(remark, dress, site) for remark in answer.cautions],
        headline=headline(check, answer, dress, site),
        program_version=__version__,
        library_version=answer.library_version,
    )


def json_findings(check: Check, answer: Answer) -> dict[str, dict[str, float | str]]:
    """Return the findings as JSON carries them: name -> value in SI and its unit."""
    return {
        line.name: {"value": answer.findings[line.name], "unit": si_unit(line)}
        for line in check.finding_lines()
        if line.name in answer.findings
    }


def headline(check: Check, answer: Answer, dress: Dress, site: Site) -> str:
    """Return the one line a list shows of an answer: what people came for."""
    declared = [line for line in check.finding_lines() if line.name in answer.findings]
    chosen = [line for line in declared if line.main] or declared
    texts = []
    for line in chosen[:3]:
        value = answer.findings[line.name]
        texts.append(f"{line.label} {value if isinstance(value, str) else two_forms(value, line, dress, site)[0]}")
    return ", ".join(texts)


def with_linked_entries(values: Mapping[str, Any], logbook: Logbook) -> dict[str, Any]:
    """Return a check's SI values with every logbook entry that is named replaced by what was found there.

    Raises Refusal, naming the field, when there is no such entry or it lacks a finding.
    """
    linked = dict(values)
    for name, value in values.items():
        if isinstance(value, Mapping) and set(value) == {"entry"}:
            try:
                linked[name] = _stage(logbook.entry(int(value["entry"])))
            except Refusal as refusal:
                raise refusal.about(name) from None
    return linked


def _stage(entry: Entry) -> dict[str, float]:
    """Return heat absorbed, heat rejected and the powers of a kept machine, each where it is known."""
    found = {name: item["value"] for name, item in entry.findings.items() if isinstance(item.get("value"), float | int)}
    wanted = ("heat_absorbed", "heat_rejected", "electrical_power", "power_to_refrigerant")
    stage = {name: float(found[name]) for name in wanted if name in found}
    if entry.check != "machine" or len(stage) < 3 or not {"heat_absorbed", "heat_rejected"} <= set(stage):
        raise Refusal(
            f"Entry {entry.number} is no machine sheet with heat absorbed, heat rejected and power.",
            "Keep the lower stage's machine sheet once it shows all three, and give its number.",
        )
    return stage
