"""The sub-commands of `python -m planner`, one module each; `registry.COMMANDS` lists them."""
