"""What single commands do besides proving; `cli` reads their arguments and hands them the world."""
