"""What was promised: bounds and recurrences, solved. Knows neither pytest nor measuring."""
