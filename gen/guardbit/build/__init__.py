"""Compilers, their flags, and runners that call compiled code in child processes."""
