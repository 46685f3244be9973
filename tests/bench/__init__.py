"""How fast the program is, beside what it is meant to be; see DEVELOPERS.md for the call."""
