"""The command line: one module a command; standard output is data, standard error is talk."""
