"""The network: arrays, exact reduction, Newton, demand and operating solutions, diagnosis."""
