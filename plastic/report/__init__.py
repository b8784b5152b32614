"""What people read: comparisons, tables and figures."""
