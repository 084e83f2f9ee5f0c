import datetime as dt, time
import pytest
from plant.deviations import actions, queries
from plant import clock
from tests.deviations import world
from django.db import connection
from django.test.utils import CaptureQueriesContext
@pytest.mark.django_db
def test_smoke():
    codes=("AAA","BBB","CCC")
    book=world.open_works(codes=codes)
    first=dt.date(2026,1,2); N=150
    def factor(c,d):
        i=(d-first).days
        if c=="AAA" and 60<=i<80: return 1.15
        if c=="BBB" and 100<=i<130: return 1-0.2*min((i-100)/10,1)
        return 1.0
    world.history(book,first,N,codes=codes,factor=factor,noise=.035,gauge_m=.005)
    now=dt.datetime(2026,7,1,tzinfo=dt.UTC)
    days=clock.days(first,first+dt.timedelta(days=N-1))
    t=time.time(); r=actions.judge(book=book,days=days,now=now); print('judge',N,'days',time.time()-t,len(r))
    for v in queries.between(book,days[0],days[-1]): print((v.raised_for-first).days,v.kind,v.subject,v.parameter,v.value,v.limit,v.likely_causes[:3],len(v.days))
    t=time.time(); r=actions.judge(book=book,days=days,now=now); print('again',time.time()-t,len(r))
    from plant.ledger.models import Entry
    n=Entry.objects.count()
    actions.judge(book=book,days=days,now=now); assert Entry.objects.count()==n
    t=time.time(); 
    with CaptureQueriesContext(connection) as c: actions.judge(book=book,days=[days[-1]],now=now)
    print('one day',time.time()-t,len(c)); print(sorted([(float(q['time']),q['sql'][:80]) for q in c])[-5:])
