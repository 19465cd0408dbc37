SwaggerUIBundle({
  url: "openapi.json",
  dom_id: "#operations",
  deepLinking: true,
  displayRequestDuration: true,
  validatorUrl: null,
  persistAuthorization: false,
});
