{% for paragraph in paragraphs %}
    // {{ paragraph.comment }}
{% for line in paragraph.lines %}
    {{ line }}
{% endfor %}
{% endfor %}
