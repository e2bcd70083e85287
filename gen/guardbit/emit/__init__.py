"""Plan, sizing and vectors to text, through the templates."""
