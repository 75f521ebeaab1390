"""What the laboratory does with a chosen buffer: predict, weigh, challenge, dilute."""
