"""Drawing data: from the records of the stages to the plain numbers that pictures and pages draw."""
