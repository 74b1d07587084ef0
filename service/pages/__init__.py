"""The pages: what people see of the service, made on the server, with a little JavaScript that asks the API."""
