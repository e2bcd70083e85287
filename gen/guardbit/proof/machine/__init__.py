"""The machine that C code runs on: memory, values in types, rules of C that may be broken."""
