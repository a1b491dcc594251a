"""Reads a picture of a polar antenna radiation-pattern chart into a table of angle against relative dB."""

__version__ = "0.1.0"
