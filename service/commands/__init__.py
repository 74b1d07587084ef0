"""The command `discwright`: one module per subcommand."""
