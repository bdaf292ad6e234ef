"""The drawing of the screen: pure functions from a state and a size to lines of styled text."""
