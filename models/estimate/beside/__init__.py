"""What can be said beside an estimate: whence its band, whether it holds, what others say."""
