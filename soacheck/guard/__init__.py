"""Checks for known mistakes of use, one module per family."""
