"""Single particles, air and their averages: cross sections and scattering matrices. No geometry."""
