"""Timing cases, a module for each room; `scripts/bench` runs them."""
