"""Three invented vessels, from which the demo workbooks are written."""
