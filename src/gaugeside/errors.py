"""What the program says when it will not give a number.

Every refusal tells three things: what was refused, why, and what to write instead.
"""

from __future__ import annotations


class Refusal(ValueError):
    """Input or a state for which no honest number exists.

    message: one sentence that says what and why.
    hint: one sentence that says what to write or do instead; may be empty.
    field: name of the reading it concerns (full words, underscores), or None when it
        concerns no single one. Set by whoever knows the field, see `about`.
    """

    def __init__(self, message: str, hint: str = "", field: str | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint
        self.field = field

    def about(self, field: str) -> Refusal:
        """Return self, naming `field` as the reading it concerns unless one is named already."""
        if self.field is None:
            self.field = field
        return self

    def sentence(self) -> str:
        """The message and the hint as one line of text."""
        return f"{self.message} {self.hint}".strip()


class UnknownRefrigerant(Refusal, KeyError):
    """A designation that is not in the catalogue."""


class NotModelled(Refusal):
    """A refrigerant that is known but for which no property model is available."""


class OutOfRange(Refusal):
    """A state beyond the critical point, the triple point or the model's range."""
