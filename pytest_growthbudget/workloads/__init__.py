"""What the measured code is fed."""
