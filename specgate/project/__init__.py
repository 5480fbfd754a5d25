"""The typed, frozen specification and its instantiation with values."""
