"""The pocket table against published saturation pressures, and what it refuses."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path
from typing import Any

import pytest

from gaugeside.cli import main

ATMOSPHERE = 101325.0  # Pa, ISO 2533


def table(capsys: pytest.CaptureFixture[str], *words: str, status: int = 0) -> str:
    assert main(["table", *words]) == status
    captured = capsys.readouterr()
    return captured.out if status == 0 else captured.err


def test_rows_by_temperature(capsys: pytest.CaptureFixture[str]):
    text = table(capsys, "R-134a", "--from", "-40 C", "--to", "40 C", "--step", "40 K", "--json")
    rows = json.loads(text)["rows"]
    # VDI Heat Atlas 2010 vapour pressures of R-134a at -40, 0 and 40 °C, kPa; the source's own deviation from the
    # equation of state is below 0.03 %.
    for row, kelvin, published in zip(rows, (233.15, 273.15, 313.15), (51.222, 292.785, 1016.626), strict=True):
        assert row["temperature"] == pytest.approx(kelvin, abs=1e-9)
        assert row["bubble_pressure"] / 1000 == pytest.approx(published, rel=5e-4)
        assert row["dew_pressure"] == pytest.approx(row["bubble_pressure"], rel=1e-6)


def test_rows_by_pressure_are_the_same_curve(capsys: pytest.CaptureFixture[str]):
    rows = json.loads(table(capsys, "R-407C", "--from", "0 bar g", "--to", "20 bar g", "--step", "0.5 bar", "--json"))[
        "rows"
    ]
    assert len(rows) == 41
    assert rows[0]["pressure"] == pytest.approx(ATMOSPHERE)
    # ASHRAE 34 normal boiling and dew point of R-407C, -43.8 and -36.7 °C, from memory; printed to 0.1 K.
    assert rows[0]["bubble_temperature"] == pytest.approx(273.15 - 43.8, abs=0.35)
    assert rows[0]["dew_temperature"] == pytest.approx(273.15 - 36.7, abs=0.35)
    middle = rows[20]
    back = json.loads(
        table(
            capsys,
            "R-407C",
            "--from",
            f"{middle['dew_temperature']} K",
            "--to",
            f"{middle['dew_temperature']} K",
            "--json",
        )
    )["rows"]
    assert back[0]["dew_pressure"] == pytest.approx(middle["pressure"], rel=1e-9)


def test_the_half_kelvin_table_has_every_row(capsys: pytest.CaptureFixture[str]):
    lines = table(capsys, "R-410A", "--from", "-50 C", "--to", "65 C", "--step", "0.5 K").splitlines()
    numbers = [line.split() for line in lines if line.split()[:1] and line.split()[0].lstrip("-")[:1].isdigit()]
    assert [float(first) for first, *_ in numbers] == [-50 + 0.5 * place for place in range(231)]
    for column in (1, 2):
        values = [float(row[column]) for row in numbers]
        assert values == sorted(values)


def test_csv_in_the_unit_and_sense_asked_for(capsys: pytest.CaptureFixture[str]):
    text = table(
        capsys, "R-134a", "--from", "0 C", "--to", "0 C", "--csv", "--pressure-unit", "kPa abs", "--units", "si"
    )
    head, row = list(csv.reader(io.StringIO(text)))
    assert head == ["temperature, °C", "bubble pressure, kPa abs", "dew pressure, kPa abs"]
    # VDI Heat Atlas as above, printed to 0.1 kPa.
    assert float(row[1]) == pytest.approx(292.785, abs=0.15)
    gauge = table(
        capsys, "R-134a", "--from", "0 C", "--to", "0 C", "--csv", "--pressure-unit", "kPa", "--sense", "gauge"
    )
    assert float(list(csv.reader(io.StringIO(gauge)))[1][1]) == pytest.approx(292.785 - 101.325, abs=0.15)


@pytest.mark.parametrize(
    ("words", "field", "says"),
    [
        (["R-410A", "--from", "-50 C", "--to", "75 C"], "to", "critical"),
        (["R-744", "--from", "-70 C", "--to", "-40 C"], "from", "triple"),
        (["R-410A", "--from", "-50 C", "--to", "20 bar g"], "to", "Give both of one kind"),
        (["R-410A", "--from", "20 C", "--to", "10 C"], "to", "below the start"),
        (["R-410A", "--from", "0 C", "--to", "60 C", "--step", "0.001 K"], "step", "wider step"),
        (["R-410A", "--from", "0 C", "--to", "60 C", "--step", "-1 K"], "step", "not above zero"),
        (["R-410A", "--from", "0 C", "--to", "60 C", "--step", "1 bar"], "step", "temperature difference"),
        (["R-410A", "--from", "0", "--to", "60 C"], "from", "no unit"),
        (["R-410X", "--from", "0 C", "--to", "60 C"], "refrigerant", "R-410A"),
        (["R-410A", "--from", "0 C", "--to", "60 C", "--pressure-unit", "furlong"], "pressure unit", "furlong"),
    ],
)
def test_refusals(capsys: pytest.CaptureFixture[str], words: list[str], field: str, says: str):
    text = table(capsys, *words, status=2)
    assert text.startswith(f"{field}: ")
    assert says in text


def test_nothing_is_written(capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    home: Any = tmp_path / "home"
    monkeypatch.setenv("GAUGESIDE_HOME", str(home))
    table(capsys, "R-134a", "--from", "0 C", "--to", "10 C")
    assert not home.exists()
