"""Orders, deliveries and transfers."""

from django.db import models

from plant.ledger.models import Record


class Delivery(Record):
    """A load received into one vessel. The certificate's strength, with its basis, wins over the product's stated one."""

    taken_at = models.DateTimeField()
    date_only = models.BooleanField(default=False)
    vessel = models.CharField(max_length=40)
    product = models.CharField(max_length=40)
    quantity = models.FloatField()
    unit = models.CharField(max_length=8)
    quantity_sd_pct = models.FloatField(default=0.5)
    lot = models.CharField(max_length=60, blank=True)
    strength = models.FloatField(null=True)
    strength_basis = models.CharField(max_length=40, blank=True)
    strength_at = models.CharField(max_length=12, default="delivery")
    density_kg_per_l = models.FloatField(null=True)
    manufactured_on = models.DateField(null=True)
    cost = models.FloatField(null=True)
    currency = models.CharField(max_length=8, blank=True)
    supplier = models.CharField(max_length=80, blank=True)
    document = models.CharField(max_length=120, blank=True)
    second_person = models.CharField(max_length=80, blank=True)
    marks = models.JSONField(default=list)

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "vessel", "taken_at"], name="delivery_by_vessel"),
            models.Index(fields=["book", "taken_at"], name="delivery_by_time"),
        ]

    def __str__(self) -> str:
        return f"{self.quantity:g} {self.unit} {self.product} into {self.vessel}"


class Transfer(Record):
    """Product moved from one vessel to another, with the carrier water that was added on the way."""

    taken_at = models.DateTimeField()
    date_only = models.BooleanField(default=False)
    from_vessel = models.CharField(max_length=40)
    to_vessel = models.CharField(max_length=40)
    quantity = models.FloatField()
    unit = models.CharField(max_length=8)
    quantity_sd_pct = models.FloatField(default=0.5)
    carrier_water_l = models.FloatField(default=0.0)
    note = models.TextField(blank=True)
    marks = models.JSONField(default=list)

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "from_vessel", "taken_at"], name="transfer_from"),
            models.Index(fields=["book", "to_vessel", "taken_at"], name="transfer_to"),
        ]


class Order(Record):
    """A load that has been ordered. It ends when it is delivered or cancelled: that is its void, with the reason."""

    product = models.CharField(max_length=40)
    quantity_kg = models.FloatField()
    ordered_on = models.DateField()
    expected_on = models.DateField()
    supplier = models.CharField(max_length=80, blank=True)
    reference = models.CharField(max_length=80, blank=True)

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "product"], name="order_by_product")]

    def __str__(self) -> str:
        return f"{self.quantity_kg:g} kg {self.product}, expected {self.expected_on}"
