"""Pages in headless Chromium with the network off."""
