"""What a chain would do with other values, and what is needed to build it."""
