"""One module for each verb of the command line: parse, call, print, exit."""
