"""What makes one doubt that traces were sent as what they are: their axis, their levels."""
