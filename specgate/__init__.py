"""The compliance checker for control-system specifications."""

__version__ = "0.1.0"
