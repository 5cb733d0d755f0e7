"""Put the folder above on the path, so that every test finds `study` and `tests.plants`."""
