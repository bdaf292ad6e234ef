"""Spread: many built chains with parts off by their tolerances, what they do, and what that costs."""
