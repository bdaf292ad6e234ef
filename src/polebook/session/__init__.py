"""The open file: its history, what it means now, and the figures that it is compared with."""
