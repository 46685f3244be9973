"""Shell completion: what may stand in a call, read off the parser, and a script of it for each shell."""
