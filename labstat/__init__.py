"""labstat: validation statistics for a clinical laboratory."""

__version__ = "0.1.0"
