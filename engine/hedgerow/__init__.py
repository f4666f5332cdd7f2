"""Replay rules for protected stock over daily prices, and say with evidence which rule to trade."""

__version__ = "0.1.0"
