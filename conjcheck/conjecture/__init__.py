"""What a user writes, where it is found, and what every rule must obey."""
