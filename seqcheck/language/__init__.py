"""From text to machine: the sequence language and its timing sheets. Only this layer knows lark and yaml."""
