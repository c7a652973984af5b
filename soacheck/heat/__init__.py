"""From junction to air: thermal networks, their modes and responses, transient curves, interfaces and
sinks."""
