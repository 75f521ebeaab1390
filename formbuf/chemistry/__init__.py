"""Solution chemistry as pure functions on arrays; knows no product and prints nothing."""
