"""A check asked with texts, as a form or a command line asks it: read, performed in plain JSON types, answered."""

from __future__ import annotations

import json

import pytest

from gaugeside.checks import CHECKS
from gaugeside.checks.perform import perform, request
from gaugeside.checks.sheet import Answer
from gaugeside.checks.typed import read_form
from gaugeside.checks.view import sentence
from gaugeside.errors import Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Site


def ask(
    check: str,
    refrigerant: str,
    *,
    datum: str = "iir",
    site: Site = SEA_LEVEL,
    dress: Dress | None = None,
    **texts: str,
) -> Answer:
    """Return the answer to what is typed; Refusal where a line, or the whole, is refused."""
    dress = dress or Dress()
    typed = read_form(CHECKS[check], texts, {}, dress, site)
    for line in typed.values():
        if line.refusal is not None:
            raise line.refusal
    values = {name: line.value for name, line in typed.items() if line.value is not None}
    asked = request(check, refrigerant, values, site=site, datum=datum, dress=dress)
    # Through JSON and back, as between the processes.
    reply = perform(json.loads(json.dumps(asked)))
    if "error" in reply:
        raise Refusal(reply["error"]["message"], reply["error"]["hint"], reply["error"]["field"])
    return Answer.from_plain(json.loads(json.dumps(reply["answer"])))


def refusal(check: str, refrigerant: str, **asked: str | Site | Dress) -> Refusal:
    """Return the refusal of what is typed, whole or of the question that could not be answered."""
    try:
        answer = ask(check, refrigerant, **asked)  # type: ignore[arg-type]
    except Refusal as refused:
        return refused
    if answer.unresolved is None:
        pytest.fail(f"answered instead of refused: {answer.findings}")
    return Refusal(
        str(answer.unresolved["message"]), str(answer.unresolved["hint"]), answer.unresolved["field"]
    )  # fmt: skip


def number(answer: Answer, name: str) -> float:
    """Return one finding that is a number."""
    value = answer.findings[name]
    assert isinstance(value, float | int)
    return value


def said(answer: Answer) -> str:
    """Return all that stands beside and under the numbers, as one text."""
    remarks = [*answer.remarks.values(), *answer.notes, *answer.cautions]
    return "\n".join(sentence(remark, Dress(), SEA_LEVEL) for remark in remarks)
