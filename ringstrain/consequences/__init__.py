"""What follows from chairs and populations at the bench, one question a module."""
