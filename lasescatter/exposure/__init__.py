"""The light that reaches a place: scattered, from surfaces, direct."""
