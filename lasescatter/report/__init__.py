"""Paper: draws an assessment as PDF, figures and tables. Computes nothing."""
