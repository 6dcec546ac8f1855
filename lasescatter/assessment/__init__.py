"""One site in, one assessment out."""
