"""The study definition: what was planned, as typed values with their places in the file."""
