"""What goes to the firmware: headers, kernels, test vectors, the manifest."""
