"""Cross sections from plain columns of numbers into a set file; what the columns leave open is asked."""
