"""Plans as data, and the evaluator that derives what the C types owe them."""
