"""The physical audit of a set: what in it contradicts itself, its file, or what is known of the gas."""
