"""The desk: what a chosen rule says at the last close, and how a person's own record compares."""
