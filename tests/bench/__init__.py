"""Benchmarks: accuracy, coverage and speed by class, beside a short script.

Run `python -m tests.bench --help`.
"""
