"""Its place puts this folder on the import path, so that every test can `import forms`."""
