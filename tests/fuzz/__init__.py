"""Random and damaged input for every command, and what must hold whatever comes of it."""
