"""Keys of a chain fitted to a measured sweep by least squares, with what the sweep can't tell."""

from __future__ import annotations

from polebook.record.fit.model import Called
from polebook.record.fit.result import Fitted, Result
from polebook.record.fit.run import Request, fit

__all__ = ["Called", "Fitted", "Request", "Result", "fit"]
