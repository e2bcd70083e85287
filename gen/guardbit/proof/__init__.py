"""Proof of C code: it is executed on symbols and compared with the contract."""
