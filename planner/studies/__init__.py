"""Pure (plan) -> answer, all through the one evaluation."""
