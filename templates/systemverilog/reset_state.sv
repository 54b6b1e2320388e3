    returning = 1'b0;
{% for output in outputs %}
    {{ output }} = {{ reset_level }};
{% endfor %}
    x_cause = 0;
