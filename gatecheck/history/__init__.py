"""What git knows about records through time."""
