"""What each part can bear."""
