"""Laws that a team keeps: studies in the project's configuration, budgets, changes between them."""
