"""Where the scatterers are and how much of them: profiles in space, loads and their sum."""
