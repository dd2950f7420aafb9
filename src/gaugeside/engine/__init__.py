"""The helper process that holds the property library, and the client that talks to it."""

from gaugeside.engine.client import Engine as Engine
from gaugeside.engine.client import Reply as Reply
