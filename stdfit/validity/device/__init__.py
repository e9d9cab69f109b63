"""What a kit does to devices; kits checked and compared."""
