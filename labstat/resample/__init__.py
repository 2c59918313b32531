"""Counts to estimates to intervals: arrays only."""
