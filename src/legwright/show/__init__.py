"""What people see: tables, records, command line."""
