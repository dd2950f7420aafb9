"""gaugeside: what a running vapour-compression machine does, from the readings at hand."""

__version__ = "0.1.0"
