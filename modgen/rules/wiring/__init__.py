"""What is connected to what."""
