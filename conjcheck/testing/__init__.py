"""The work: comparing rows, surveying, probing, minimising, explaining."""
