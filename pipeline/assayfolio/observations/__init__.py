"""Raw data files as exact decimals, each with its line."""
