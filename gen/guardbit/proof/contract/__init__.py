"""The arithmetic contract, stated once more, over symbols."""
