"""What the service keeps."""
