"""What each key does to the state: no widget, no drawing. A file for each concern; `pressing` is the way in."""

from polebook.tui.control.base import Outcome
from polebook.tui.control.opening import opening
from polebook.tui.control.pressing import paste, press

__all__ = ["Outcome", "opening", "paste", "press"]
