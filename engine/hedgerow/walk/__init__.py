"""The walk: from a market, a surface and a strategy to an event log."""
