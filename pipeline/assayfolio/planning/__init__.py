"""What a plan can show: power, sample size, detectable difference; from the plan alone."""
