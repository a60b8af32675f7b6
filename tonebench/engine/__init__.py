"""Real time: the client, its child process, the callback, the guard, devices and the silent clock."""
