"""Published laws and exact arithmetic as pure numpy functions, each with its source."""
