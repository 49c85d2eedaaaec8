"""Audits: whether recursive code follows the recurrence that was promised, term by term."""
