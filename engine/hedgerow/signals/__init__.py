"""What a rule may look at: named signals of the market, known at each close."""

from hedgerow.signals import bands, dividends, fundamentals, momentum, timing, trend
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import SIGNALS, Number, Parameter, Signal, named_signal, signal

__all__ = [
    "SIGNALS",
    "Number",
    "Panel",
    "Parameter",
    "Signal",
    "bands",
    "dividends",
    "fundamentals",
    "momentum",
    "named_signal",
    "signal",
    "timing",
    "trend",
]
