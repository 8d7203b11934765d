"""The terminal editor. Textual is imported here and nowhere else."""
