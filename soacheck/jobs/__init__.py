"""Questions put to `check`."""
