"""Applying the plan to the observations: the one place where a study meets statistics."""
