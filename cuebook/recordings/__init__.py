"""From a file to a Recording: readers, time, cleaning. Pure."""
