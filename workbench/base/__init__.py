"""What is true before any measurement: words, constants, quantities, uncertainty, errors."""
