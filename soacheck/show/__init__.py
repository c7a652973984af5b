"""Renderings of a result; nothing is computed here."""
