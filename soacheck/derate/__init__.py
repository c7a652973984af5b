"""Derating rules: the user's own factors, and published rules by document number."""
