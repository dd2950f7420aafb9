"""Keys in turn: over a slow link many arrive at once, and each must find the screen as the one before left it."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass
from functools import partial
from time import monotonic
from typing import Any

from textual import events, on
from textual.app import App
from textual.await_complete import AwaitComplete
from textual.message import Message
from textual.message_pump import MessagePump

# Seconds after which a key whose end was never reported no longer holds back the next.
_LONGEST = 0.5
_PAUSE = 0.02
# A binding is looked up when the key has come all the way up; what its action posts to the field goes up once more.
_TRIPS = 2


class KeysInTurn(App[None]):
    """An app that hands a key on only when the one before has done its work.

    The screen library sends every key that has arrived to the field that has the focus at that moment, so that of
    keys in one burst those after a Tab, an Enter or a function key went to the field before.
    """

    @dataclass
    class Done(Message):
        """Follows a key on its way up through the widgets, behind all that the key has caused there."""

        target: MessagePump
        turn: int
        trip: int

    def __init__(self, **options: Any) -> None:
        self._held: deque[events.Key | events.Paste] = deque()
        self._turn = 0
        self._in_turn = False
        self._since = 0.0
        super().__init__(**options)

    @property
    def is_idle(self) -> bool:
        """Whether every key that has arrived has done its work."""
        return not self._in_turn and not self._held

    @property
    def is_busy(self) -> bool:
        """Whether a key had better wait for what is going on outside the screen."""
        return False

    async def on_event(self, event: events.Event) -> None:
        """Hold a key back while another is at work; everything else goes its way at once."""
        if not isinstance(event, events.Key | events.Paste) or event.is_forwarded:
            await super().on_event(event)
            return
        self._held.append(event)
        if not self._in_turn:
            await self._hand_on()
        elif len(self._held) == 1:
            self._wait_no_longer(self._turn)

    def pop_screen(self) -> AwaitComplete:
        """Take the screen on top away; what follows a key through it would be lost with it."""
        awaited = super().pop_screen()
        self.call_later(self._follow, self.screen, self._turn, 1)
        return awaited

    async def _hand_on(self) -> None:
        if not self._held or not self.screen_stack:
            return
        self._in_turn = True
        self._turn += 1
        self._since = monotonic()
        if len(self._held) > 1:
            self._wait_no_longer(self._turn)
        target: MessagePump = self.focused or self.screen
        await super().on_event(self._held.popleft())
        await self._follow(target, self._turn, 1)

    def _wait_no_longer(self, turn: int) -> None:
        self.set_timer(_LONGEST, partial(self._free, turn))

    async def _follow(self, target: MessagePump, turn: int, trip: int) -> None:
        """Send a message up behind all that is on its way."""

        def post() -> None:
            if not target.post_message(self.Done(target, turn, trip)):
                self.post_message(self.Done(target, turn, trip))

        # Behind what stands in the queue, so that what that posts there stands before the message.
        if not target.call_later(post):
            await self._free(turn)

    @on(Done)
    async def _done(self, event: Done) -> None:
        event.stop()
        if event.turn == self._turn and event.trip < _TRIPS:
            await self._follow(event.target, event.turn, event.trip + 1)
        else:
            await self._free(event.turn)

    async def _free(self, turn: int) -> None:
        if turn != self._turn or not self._in_turn or not self.screen_stack:
            return
        if self.is_busy and monotonic() - self._since < _LONGEST:
            self.set_timer(_PAUSE, partial(self._free, turn))
            return
        self._in_turn = False
        await self._hand_on()
