"""The rule language: strategies as frozen models, read from files with every fault and its place."""
