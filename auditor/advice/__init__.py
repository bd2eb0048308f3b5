"""What follows from the judgement: other usages, changes that mend, answers that would settle."""
