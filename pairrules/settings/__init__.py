"""What a project asks for: rule sets, classes of pairs, limits with units, waivers."""
