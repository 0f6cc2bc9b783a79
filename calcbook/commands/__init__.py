"""What each command does, one function of the parsed arguments per command."""
