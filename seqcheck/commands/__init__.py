"""What a command does between the pipeline and the command line: it brings together what no report may work out."""
