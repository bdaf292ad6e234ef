"""The chain beside the hardware: what was posted of it, what git has of it, and what was measured on built ones."""
