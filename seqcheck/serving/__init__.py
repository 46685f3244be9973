"""A language server: the Language Server Protocol, version 3.17, on standard input and output."""
