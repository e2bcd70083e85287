"""The C front end: sources to functions that run on symbols, types settled beforehand."""
