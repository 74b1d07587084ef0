"""The program round the computation: the commands, the HTTP service, the demo."""
