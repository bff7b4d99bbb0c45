"""One file a job: what the command line and Python callers ask for."""
