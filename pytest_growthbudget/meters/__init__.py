"""What is read: clocks, counters, memory."""
