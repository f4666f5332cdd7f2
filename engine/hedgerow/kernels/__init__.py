"""Compiled code: floats, arrays and records in, a status out. The only room that imports numba."""
