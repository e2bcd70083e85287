"""The bound on the distance between the output and the ideal filter's, and its causes."""
