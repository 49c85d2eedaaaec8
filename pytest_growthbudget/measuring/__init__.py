"""How it is read: climb, rounds, guards."""
