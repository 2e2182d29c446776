"""Kneeboard cruise tables for piston aeroplanes with constant-speed propellers."""

__version__ = "0.1.0"
