"""The one door: rounds, files and corrections come in here, each as one Entry, and are judged once they are safe."""
