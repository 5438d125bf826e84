"""Write to a library: functions that take an open transaction and plain values."""
