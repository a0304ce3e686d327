"""Working the numbers: a resolved sheet in, its trace out."""
