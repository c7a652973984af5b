"""Limits: one module per limit, data in, findings out."""
