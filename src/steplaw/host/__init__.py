"""The child process that runs a subject, and the parent's side of it."""
