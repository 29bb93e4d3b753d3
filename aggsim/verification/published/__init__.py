"""Figures from outside, each beside its source, and what the library makes of them."""
