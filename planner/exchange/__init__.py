"""Files in and out: text or bytes to domain objects and back."""
