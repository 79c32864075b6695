"""Benchmarks: `python -m tests.bench` prints ratios that are measured in one run on one machine."""
