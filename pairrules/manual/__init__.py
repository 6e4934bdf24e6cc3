"""The manual: what each rule judges and each figure means, drawn from the rules' own files, rule sets and glossary."""
