"""Currency codes.

Source     ISO 4217 list one, as published by its maintenance agency, SIX.
Taken      the alphabetic codes of all entries with a minor unit that are not marked
           as funds: currencies in which something can be paid.  Precious metals,
           units of account, bond units and test codes are left out.
Precision  exact; the list of 2026-01-01.
Errata     BGN left the list on that day, with the euro in Bulgaria (from memory).
           It stays here: an estimate of 2025 must still be read.  When the list is
           renewed, codes are added and none is removed.
"""

_CODES = (
    "AED AFN ALL AMD AOA ARS AUD AWG AZN BAM BBD BDT BGN BHD BIF BMD BND BOB BRL "
    "BSD BTN BWP BYN BZD CAD CDF CHF CLP CNY COP CRC CUP CVE CZK DJF DKK DOP DZD "
    "EGP ERN ETB EUR FJD FKP GBP GEL GHS GIP GMD GNF GTQ GYD HKD HNL HTG HUF IDR "
    "ILS INR IQD IRR ISK JMD JOD JPY KES KGS KHR KMF KPW KRW KWD KYD KZT LAK LBP "
    "LKR LRD LSL LYD MAD MDL MGA MKD MMK MNT MOP MRU MUR MVR MWK MXN MYR MZN NAD "
    "NGN NIO NOK NPR NZD OMR PAB PEN PGK PHP PKR PLN PYG QAR RON RSD RUB RWF SAR "
    "SBD SCR SDG SEK SGD SHP SLE SOS SRD SSP STN SVC SYP SZL THB TJS TMT TND TOP "
    "TRY TTD TWD TZS UAH UGX USD UYU UYW UZS VED VES VND VUV WST XAD XAF XCD XCG "
    "XOF XPF YER ZAR ZMW ZWG"
)

CURRENCIES = frozenset(_CODES.split())
