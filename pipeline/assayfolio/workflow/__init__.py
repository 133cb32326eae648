"""The numbered steps of a run: the only readers of clock, user and disk roots."""
