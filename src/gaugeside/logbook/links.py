"""Entries that name others by their number: a logbook that takes entries of another one in gives all new numbers."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

from gaugeside.logbook.entry import Entry


def linked_first(entries: Sequence[Entry]) -> list[Entry]:
    """Return the entries in their order, but those that others name before these; a number that comes twice is none."""
    counts = Counter(entry.number for entry in entries)
    # Each with those of its targets that were not looked at yet.
    waiting: dict[int | None, list[tuple[Entry, Iterator[int]]]] = {number: [] for number in counts}
    placed: list[Entry] = []
    done: set[int | None] = set()
    for own in entries:
        entry = own if counts[own.number] == 1 else replace(own, number=None)
        ready = [(entry, iter([number for _, number in links(entry) if counts[number] == 1]))]
        while ready:
            one, targets = ready.pop()
            missing = next((number for number in targets if number not in done), None)
            if missing is not None:
                waiting[missing].append((one, targets))
                continue
            placed.append(one)
            done.add(one.number)
            if one.number is not None:
                ready += reversed(waiting.pop(one.number, []))
    # What is left names each other in a ring.
    return placed + [entry for ring in waiting.values() for entry, _ in ring]


def links(entry: Entry) -> list[tuple[str, int]]:
    """Return the readings of an entry that are the number of another one."""
    found = []
    for name, text in entry.readings.items():
        digits = text.strip().removeprefix("#").strip()
        if f"{name}.entry" in entry.values and digits.isascii() and digits.isdigit() and len(digits) <= 9:
            found.append((name, int(digits)))
    return found


def relinked(entry: Entry, numbers: Mapping[int, int]) -> Entry:
    """Return an entry that names others by their new `numbers`; one that stayed behind is told and names none here."""
    readings, values, cautions = dict(entry.readings), dict(entry.values), list(entry.cautions)
    for name, number in links(entry):
        if number in numbers:
            readings[name], values[f"{name}.entry"] = str(numbers[number]), float(numbers[number])
            continue
        # A text that no form takes for a number, else it would name whatever has that number here.
        readings[name] = f"{number} of another logbook"
        of = f"entry {number} of the logbook it was taken from, not of this one"
        cautions.insert(0, f"Its {name.replace('_', ' ')} is {of}.")
    return replace(entry, readings=readings, values=values, cautions=cautions)
