"""What people type about people."""
