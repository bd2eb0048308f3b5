"""The commands: options in, exit status out; everything heavy is imported where it is used."""
