"""What load kinds are made of: physics shared by several, or too long for one file. None here is a kind."""
