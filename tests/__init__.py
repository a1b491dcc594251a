"""Tests of digitise; `tests.draw` paints charts from known patterns, `tests.bench` measures accuracy and speed."""
