"""Off-axis scattered laser light beside a beam, judged against the exposure limits a user enters."""

__version__ = "0.1.0"
