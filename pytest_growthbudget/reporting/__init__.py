"""What is said."""
