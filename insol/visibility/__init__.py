"""The visibility mask: what was asked of the sky and what it answered, stored."""
