"""Pure (plan, evaluation, answer) -> rows of text. Every label, number and verdict is phrased here once."""
