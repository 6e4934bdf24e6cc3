"""The rules, one a file; `rule.all_rules()` finds them by walking this folder."""
