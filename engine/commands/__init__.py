"""The commands without a screen: arguments in, text or files out, an exit code back."""
