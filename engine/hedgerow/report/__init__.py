"""What people look at: the comparison in a terminal, the folder of a run, and the cautions beside both."""
