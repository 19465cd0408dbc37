"""The whole trace at once: a lossy line of several sections, fitted to what was recorded."""
