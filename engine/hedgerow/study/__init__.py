"""Declared experiments: a market, an account, assumptions, and the strategies to compare."""
