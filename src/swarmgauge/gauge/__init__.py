"""Sets held against physics and against measurements."""
