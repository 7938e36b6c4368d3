//! What is asked: the command line, one file for each command.
