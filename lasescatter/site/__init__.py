"""What a user may write: reading a site file, its errors, starter files and schema."""
