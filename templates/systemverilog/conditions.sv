
  // -- Conditions -------------------------------------------------------------------------------
  // Each quantity is a polynomial in coordinates x of the conditions, which are clamped to where
  // it was characterised; t, v and c stand for temperature, supply and common mode, a digit for
  // the power. It is folded one condition at a time, so that only what has changed is repeated.

{% for line in declarations %}
  {{ line }}
{% endfor %}
{% for stage in stages %}

  task {{ stage.task }};
    begin
{% for paragraph in stage.paragraphs %}
{% if paragraph.comment %}
      // {{ paragraph.comment }}
{% endif %}
{% for line in paragraph.lines %}
      {{ line }}
{% endfor %}
{% endfor %}
    end
  endtask
{% endfor %}
