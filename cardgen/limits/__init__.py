"""Limits, gauges and the one function that holds a setting against them."""
