"""What each amplifier can take and give."""
