"""What the map shows: colours that follow modules, and the elements of the close-up."""
