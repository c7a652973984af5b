"""Heat made against heat removed: the operating temperatures of a duty."""
