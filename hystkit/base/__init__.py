"""What every other layer stands on: errors, engineering numbers, names, and views of results."""
