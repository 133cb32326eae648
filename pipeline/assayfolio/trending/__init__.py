"""Control charts over lots: the results of a study's sealed runs, in order, against limits and rules."""
