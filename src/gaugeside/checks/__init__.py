"""The checks a person can run, by name."""

from gaugeside.checks import component, machine, saturation, stream, superheat
from gaugeside.checks.sheet import Check

CHECKS: dict[str, Check] = {
    check.name: check for check in (saturation.CHECK, superheat.CHECK, component.CHECK, stream.CHECK, machine.CHECK)
}
