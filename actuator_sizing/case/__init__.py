"""From what the user typed to a `Case`: read, check, understand, write."""
