"""Load kinds: each turns its parameters into duties. A kind is found by its file name and imported when asked for."""
