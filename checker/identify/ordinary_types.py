"""Type families of parts that do not insulate: semiconductors, regulators, controllers, protection parts, common circuits.

Written from general knowledge of the trade; makers' data sheets agree on what each series is (from memory, not checked sheet
by sheet). A part named here is never taken for an unlisted isolator, so circuits stand here only when the series holds no
insulating member. How patterns are read: see checker.identify.families.
"""

from __future__ import annotations

Row = tuple[str, str, dict[str, str], str]

_MAKERS = "(?:L|LM|MC|UA|KA|KIA|AN|NJM|TA|UPC|CJ|HT|WS|BA|AZ|NCV|LR)?"  # the letters before 78 and 79
_CELL = "(?:03|04|06|08|10|15|20|25|30|40|50|55|60|65|70|80|90|100|120|150)"  # a transistor's voltage in ten volts

POWER: tuple[Row, ...] = (
    (
        "controller",
        "off-line switcher or controller",
        {"offline": "yes"},
        r"TNY\d{3} TOP2\d\d TOP[A-Z]{1,2}2\d\d LNK\d{3,4} LYT\d{3,4} INN[234]\d{3} TFS7\d\d PFS[57]\d{3} LCS7\d\d VIPER\d"
        r" NC[PV]1[012]\d\d NCP13[0-4]\d FSQ\d{3,4} FSCQ?\d{3,4} FSL\d{3} FSD[HLM]?\d{3,4} FSE[ZB]\d{4} FAN6[0-9]\d\d"
        r" FAN10[0-4]"
        r" FAN76\d\d KA[15][HLM]\w{4} ICE[2-5][A-Z]\w{3} OB2[2-5]\d\d OB33\d\d DK1\d{2,3} DK[25]\d\d THX2\d\d SM[78]0\d\d"
        r" KP[1-3]\d{4}"
        r" KP[35]\d\d[A-Z] BP[2389]\d{3} MP1[5-7]\d(?:G|$|-) HF5\d\d HF9\d\d CR6\d{3} ACT3\d\d IW(?:1[5-9]|3\d)\d\d"
        r" LD(?:53|55|57|75|77|78|90)\d\d LP37\d\d UCC28[67]\d\d UCC256\d{2,3} TEA1[5-9]\d\d TEA19\d{3} STR-?[A-Z]{1,2}\d{3,4}"
        r" MR[45]\d{3} TDA4605 TDA1683\d SY50\d{3} PN8\d{3} ALTAIR\d HVLED\d{3}",
    ),
    (
        "controller",
        "power-factor or resonant controller",
        {"offline": "yes"},
        r"L656\d L6591 L659[89] L6699 L498[14] NCP139\d NCP16\d\d UCC[23]805\d UCC2806\d UCC[23]81[78] FAN79\d\d FAN48\d\d"
        r" FSFR\d{4}"
        r" ICE[123]PCS\d\d ICE1HS\d\d IRS27951 IR1150 IR1155 MC3326[0-2] MC34262",
    ),
    (
        "controller",
        "switching controller",
        {},
        r"U[CK]C?[123]84\d UCC?[123]80\d UC[123]52[4-8] UCC289\d{1,2} SG[123]52\d KA3525 KA384\d KA7500 TL494 TL594 TL598"
        r" LT124\d"
        r" LM5[01]\d\d LM2502\d LM3478 LM3481 LM3488 MAX1500\d MAX1759\d NCP3063 TPS40\d{3}",
    ),
    (
        "controller",
        "powered-device controller",
        {},
        r"TPS237\d TPS2378\d SI340\d(?!E?DB) MAX594\d MAX596\d MAX598\d LTC42[56]\d LT427\d",
    ),
    (
        "shunt-reference",
        "shunt reference",
        {},
        r"(?:TL|TLV|LM|LMV|KA|KIA|AZ|ATL|AS|AP|UTC|SPX|NCP|NCV|CJ|NJM|BL|ZR|WS|UMW)43[12] TL1431 TLVH43[12] TLA431 TS2431"
        r" LM404[01]"
        r" LM405[01] LM[123]85-? LM[123]36-? LT1004 LT1009 ADR50\d LM4431 ZXRE\d{3} REF1112",
    ),
    (
        "regulator",
        "linear regulator",
        {},
        rf"{_MAKERS}7[89][LMN]?(?:33|05|06|07|08|09|10|12|15|18|20|24)(?:[A-Z]|$|-) LM[123]17(?:[A-Z]|$|-)"
        rf" LM[123]37(?:[A-Z]|$|-) LM350"
        r" LM338 LM330 LT108[3-7] LT176\d LT196\d L[DM]1117 AMS1117 AMS108\d LD108\d NC[PV]1117 AZ1117 SPX1117 REG1117 TLV1117"
        r" TS1117"
        r" AP1117 AMC1117 CJ[AT]?1117 ME1117 XC6[1-9]\d\d LD29\d{3} LD39\d{3} LP29\d\d LP59\d\d LM29[34]\d AP21\d\d AP2210"
        r" AP73\d\d"
        r" MIC5\d{3} MIC29\d{3} HT7[135]\d\d MCP17\d\d MCP18\d\d TPS7[0-9A]\d{2,3} TLV7\d{2,4} ADP33\d\d ADP71\d\d ADP15\d"
        r" RT9\d{3}"
        r" ME62\d\d L4931 L494[01] TLE42\d\d LF\d{2}[AC] UA723 LM723 662K$ K78\d\d-\d OKI-?78SR R-?78[A-Z]{0,2}\d"
        r" TSRN?-?\d-\d{4}",
    ),
    (
        "regulator",
        "switching regulator",
        {},
        r"LM25[79]\d LM267\d LM2267\d LMR\d{5} MP1[4-6]\d\d MP23\d\d MP24\d\d MP44\d\d XL[14567]\d{3} TPS5[46]\d{3,4}"
        r" TPS6[0-3]\d{3}"
        r" TPS82\d{3} SY8\d{3} RT8\d{3} AP150\d AP32\d\d AP34\d\d AP62\d{3} AP63\d{3} AOZ12\d\d ACT4\d{3} MT3608 MT2492 SX1308"
        r" SDB628"
        r" L597\d MC3[34]063 ICL7660 MAX660 MCP163\d\d ST1S\d\d",
    ),
)

SEMICONDUCTORS: tuple[Row, ...] = (
    (
        "bridge",
        "bridge rectifier",
        {},
        r"[ALTYU]?MB(?:05|[124678]|10)[SFM] [AT]BS(?:[1-8]|10)$ DB10[1-7] DB[FL]?S?(?:15|20)\d"
        r" DF[BL]?S?(?:005|0[1-8]|10|15\d\d|20\d)[MS]?"
        r" KB(?:P|PC|L|U|J|PM)\d{1,5} [23]KBP\d\d G(?:BU|BJ|BL|BP|BPC|SIB)\d{1,4} B\d{2,3}C\d{3,4} W(?:005|0[1-8]|10)[MG]"
        r" [2-4]W(?:005|0[1-8]|10)"
        r" RS[2-6]0[1-7] 26MB\d 36MB\d HD0[1246]",
    ),
    (
        "zener",
        "zener diode",
        {},
        r"BZX\d\d BZT\d\d BZV\d\d BZG\d\d BZD\d\d BZM55 PDZ\d PLZ\d MM[SBX]Z\d MM[1-5]Z\d SMAZ\d ZMM\d ZPD\d ZPY\d 1N47[2-6]\d"
        r" 1N52[2-8]\d"
        r" 1N53[3-8]\d 1N59[1-5]\d 1N7[45]\d 1SM[AB]47\d\d 1SM[AB]59\d\d UDZ[SV] GDZ\d DDZ\d TZM[BC]\d TZX\d AZ23C\d",
    ),
    (
        "tvs",
        "transient suppressor",
        {},
        r"SM[ABCD]J\d SMF\d SMFJ\d SM6T\d 1SM[BC]\d{1,3}A P[46]KE\d P6SMBJ?\d P4SMAJ?\d 1\.5KE\d 1V5KE\d 1\.5SMC\d 5KP\d"
        r" 15KPA?\d PESD\d"
        r" USBLC6 ESDA\d ESD\d ESDCAN SRV?0[3-5]- SRV05 SP050\d TPD\d[EFS]\d IP42\d\d PRTR5V RCLAMP\d{4} NUP\d{4} CDSOT\d\d"
        r" GSOT\d\d PTVS\d"
        r" SM712 D5V0",
    ),
    (
        "diode",
        "diode",
        {},
        r"1N400[1-7] LL400[1-7] SM400[1-7] 1N4148 LL4148 LS4148 1N4448 LL4448 1N4150 1N91[46] 1N58[12]\d 1N540\d 1N5711 1N6263"
        r" 1N493\d UF40\d\d"
        r" UF540\d HER[1-6]0[1-8] FR[1-6]0[1-7] RS[1-3][ABDGJKM] US[1-3][ABDGJKM] ES[1-3][A-J] GS[12][A-M] S[1-5][ABDGJKM]$"
        r" S1[ABDGJKM] M7$"
        r" MUR[SA]?\d{3,4} BYV\d\d BYT\d\d BYW\d\d BY[12]\d\d SS1[2-9] SS[2358][2-6] SS110 SS[235]1[05] SK[1-5][2-6]"
        r" SB[1-8][0-9]{1,3}$ SR[1-5]\d0"
        r" B58[12]\d B[1-5][2-6]0[ABC] B5819 MBRS?[A-Z]?\d{3,5} PMEG\d{4} STTH\d STPS\d BAT\d\d BAV\d\d BAS\d{2,3} BAW\d\d"
        r" V[0-9]{1,2}P[0-9]{1,2}"
        r" 1SS\d{3} C[34]D\d{5} IDH\d\d RHRP?\d RURP?\d 6A10 10A10 SD10[13] FES\d\d",
    ),
    (
        "varistor",
        "varistor",
        {},
        r"(?:0?5|0?7|10|14|20|25|32|34|40)[DKN]-?\d{3}[KLM]? S(?:05|07|10|14|20|25)K\d{2,3} V\d{2,4}[LZMPCEH]A\d ERZ-?[EVC]\d"
        r" MOV-?\d{2}D"
        r" B722\d{2,4} TVR\d{5} SIOV TMOV\d",
    ),
    (
        "thermistor",
        "thermistor",
        {},
        r"\d{1,2}D-?(?:5|7|8|9|11|13|15|18|20|25)$ NTC-?\d{1,2}D-?\d{1,2} MF5[2-9] MF7[2-4] MF11 B57\d{3} B59\d{3} NTCLE\d"
        r" NTCG\d NTCS0\d"
        r" ERT-?J\d NCP(?:15|18|03|21)[WX] KTY8\d PT100 PT1000",
    ),
    (
        "common-mode-choke",
        "current-compensated mains choke",
        {},
        r"RN[1-4][0-4]2-\d B8272[0-6] B8273[0-4] 74482[1-5] UU(?:9\.8|10\.5)",
    ),
    ("gas-tube", "gas discharge tube", {}, r"[23]R\d{3,4}[A-Z]?- [23]RM\d{3} B88069 2051-\d\d 2049-\d\d 20(?:26|27|36|38)-\d\d"),
    (
        "resettable-fuse",
        "resettable fuse",
        {},
        r"MF-[LMNPRSU]\w{0,4}\d{2,3} (?:MINI|NANO|MICRO)SMD[A-Z]?\d{3} NSMD\d{3} RXEF?\d{3} RUEF?\d{3} \d{4}L\d{3}$"
        r" 0ZC[A-Z]\d{4}",
    ),
    (
        "triac",
        "triac",
        {},
        r"BTA[0-4]\d BTB[0-4]\d BT13[4-9] BT14\d MAC(?:\d{1,3}|97A\d) Z01\d\d T4\d\d-\d{3} Q[46]\d{3}[A-Z] L[46]0\d\d[A-Z]"
        r" ACST?\d{1,2}-\d TIC2\d\d",
    ),
    (
        "thyristor",
        "thyristor",
        {},
        r"BT15[0-9] BT16[89] MCR\d{2,3} C106[A-Z] TYN\d{3,4} 2N506\d S[68]0(?!50)\d\d[A-Z] TIC10\d X04\d\d P0102",
    ),
    (
        "igbt",
        "IGBT",
        {},
        r"I[GHK][PWBDQ]\d{2}N\d{2,3} IRG[4P7]\w\w? FG[AHPW]\d\d[NST] STG[BFPW]\d\d[NH] HGT[GP]\d NGT[BG]\d SKW\d\dN SGP\d\dN",
    ),
    (
        "mosfet",
        "MOSFET",
        {},
        rf"\d{{1,3}}N{_CELL}[A-Z]{{0,3}}(?:$|-) 2N700[0-2] BSS(?:84|8\d|1\d\d) BS170 BS250 BSC\d{{2,3}}[NP] BSZ\d{{2,3}}[NP]"
        rf" AO[34]\d{{3}} AON[RS]?\d{{4,5}} AO[DT]\d{{3,4}}"
        r" IR[FL][A-Z]{0,3}\d{2,5} SI[1-7]\d{3}[A-Z]{1,3} SI2\d{3} SI8\d{2,3}E?DB SIR\d{3} SQJ?\d{3,4} STP\d{1,3}N[A-Z\d]"
        r" ST[BDFUW]\d{1,3}N[A-Z\d] FQ[APDU][F]?\d{1,3}N"
        r" FD[PBSNVC]\d{2,5} FDMS\d{4} BUK\d{3,4} PSMN\w PMV\d\d IP[ABDPW]\d{2,3}[NPR] SP[AWPD]\d\dN IMW\d{2,3}R C[23]M0\d{6}"
        r" CSD\d{5} NT[DRSM][A-Z]{0,2}\d{2,4} DM[NPG]\d{3,4}"
        r" ZXM[NP]\w\d ZVN\d{4} ZVP\d{4} VN2222 RFP\d\dN MTP\d\dN HUF7\d 2SK\d{2,4} 2SJ\d{2,4} FQP\d\dN NCE\d{2,4} WPM\d{4}"
        r" WNM\d{4} RJK\d{4} DN25\d\d LND150",
    ),
    ("jfet", "junction FET", {}, r"2N54[56]\d 2N3819 J1(?:1[1-3]|7[4-7])$ MMBFJ\d{3} BF245 BF256 2SK170 J310"),
    (
        "bipolar",
        "bipolar transistor",
        {},
        r"[PM]?N?2N(?:22(?:19|22)|2369|2484|29(?:05|07)|3053|3055|3439|377[1-3]|39(?:04|06)|440[13]|508[7-9]|5401|5551|5416|6488)"
        r" PN2222 PN2907 MMBT[A-Z]?\d{2,4}"
        r" [LS]?BC(?:1[0-9]\d|2[0-9]\d|3[0-9]\d|5[0-9]\d|6[0-9]\d|8[0-9]\d) BC[PXVW]\d\d BD[12]\d\d BD[4-9]\d\d BU[LT]?\d{2,4}"
        r" MJE\d{3,5} MJD\d{2,4} MPSA\d\d TIP\d{2,3}"
        r" SS8[05]50 SS90\d\d S8[05]50 S901[2-8] DTA\d DTC\d DDT[AC]\d PDT[AC]\d MUN[25]\d{3} BCR1\d\d PBSS\d{4}"
        r" 2S[ABCD]\d{2,4} FZT\d{3} FMMT\d{3} ZTX\d{3}"
        r" MJE1300\d ST1300\d PZT2222 KSP\d\d BFR9\d BF42\d KTC\d{3,4} KTA\d{3,4}",
    ),
    ("led", "LED", {}, r"WS281[1-5] SK6812 APA102"),
)

CIRCUITS: tuple[Row, ...] = (
    (
        "module",
        "radio or processor module",
        {},
        r"ESP32 ESP8266 ESP-?(?:0[1-9]|1[2-5]|WROOM|S2|S3|C3) WROOM-?\d XIAO D1-?MINI RFM\d\d SIM[789]\d{2} NRF24L01 HC-?0[56]$"
        r" HLK-?(?:7688|RM04|LD\d{3,4}|V20)",
    ),
    (
        "sensor",
        "sensor",
        {},
        r"DS18[BS]20 DHT[12]\d BM[EP]\d{3} SHT[347]\d HDC\d{4} SI702\d LM35 LM75 TMP\d{2,3} MPU-?\d{4} LSM\d{1,3}[A-Z]"
        r" LIS\d[A-Z] ADXL\d{3}"
        r" MAX318\d\d MAX6675 A13\d\d[A-Z] A3144 SS49E DRV50\d\d BH17\d\d VL53L TSOP\d{4} VS1838 IRM-?[23]6\d\d MLX906\d\d",
    ),
    (
        "ic",
        "microcontroller or programmable logic",
        {},
        r"STM(?:32|8)[A-Z] AT(?:MEGA|TINY|XMEGA)\d ATSAM\w ATM?EGA\d AVR\d{2,3}D PIC(?:1[0268]|24|32)\w DSPIC\d\d RP20[34]0"
        r" RP235\d NRF5[1-4]\d SAM[DCE]\d"
        r" MSP430 TMS320 F28\d{3} LPC[1-5]\d{2,3} MK[LEV]?\d\d[A-Z] S32K\d CY8C\d EFM(?:8|32) EFR32 CH32[A-Z] CH55\d GD32\w"
        r" AT32F HC32\w N76E\d STC(?:8|12|15)\w"
        r" R7F[A0] XC(?:3S|6S|7A|7Z) EP[1-4]C\w EPM\d{3,4} 10M\d\d ICE40 LFE5 LCMXO AT89\w",
    ),
    (
        "ic",
        "interface circuit",
        {},
        r"MAX23[2-9] MAX202 MAX3232 MAX322[0-9] MAX48\d MAX308\d MAX348\d SP3232 SP3485 SP48\d ST3485 ADM485 ADM3485 ADM232"
        r" ADM3202 SN65(?:HVD|LBC|LVDS)\d SN75\d{3,5}"
        r" THVD\d{4} ISL83\d{2,3} ISL31\d{2,3} LTC485 TJA1\d{3} MCP2515 MCP2551 MCP2561 MCP2562 MCP251[5-8] TCAN\d{3,4}"
        r" SIT1050 CH34\d CH33\d FT23\d FT22\d\d FT42\d\d CP21\d\d"
        r" PL2303 MCP222[01] USB251\d TUSB\d{3,4} LAN(?:87|88|91|92|93|94|95|78|89)\d\d W5[1-5]00 ENC28J60 DP838\d\d KSZ\d{4}"
        r" RTL8\d{3} IP101 PCA95\d\d PCF857\d TCA95\d\d"
        r" MCP23[0S]\d\d TXB010\d TXS010\d SN6501 SN6505 SN6507 MAX253 MAX1325[36] LT3999 LT3439 VPS870\d",
    ),
    (
        "ic",
        "analogue circuit",
        {},
        r"LM(?:[123]58|2904|2902|[123]24|[123]39|[123]93|2901|2903|[123]11|386|741|833|837|318|3914|3915|567)(?:[A-Z]|$|-|/)"
        r" LMV3\d\d LF35[1-9] LF4\d\d TL0[5-8]\d"
        r" TLC27\d TLC555 TLV(?:2[234]\d\d|900\d) OPA\d{3,4} OP07 INA(?:1\d\d|2\d\d) MCP60\d\d? MCP6[0-9]\d NE55\d NE553\d"
        r" SA555 ICM755\d ICL71\d\d 555$ RC4558 JRC4558 NJM4558 UA741"
        r" TDA7\d{3} TDA20\d\d HLW80\d\d BL09\d\d CSE77\d\d ADS1[01]\d\d ADS1[2]\d\d MCP320\d MCP3[34]\d\d MCP47\d\d DS1307"
        r" DS3231 PCF8563 MAX809 MAX810 MAX80[39] TPS38\d\d",
    ),
    (
        "ic",
        "driver or logic circuit",
        {},
        r"(?:SN|MC|DM|CD|MM|M|U|NL)?74(?:HCT?|AHCT?|LVC|LV|ACT?|LS|ALS|S|F|VHCT?|AUP|ABT|LCX)[1-3]?G?\d{2,5} CD4\d{3}"
        r" HEF4\d{3} MC14\d{3} HCF4\d{3} TC74\w NC7SZ?\d"
        r" ULN2[08]\d\d ULQ2\d{3} TPL7407 TBD62\d{3} L29[38] L298N DRV8\d{3} TMC\d{4} A49\d\d BTS\d{3,4} TC44\d\d TC42\d\d"
        r" MIC44\d\d IR2[01]\d{1,3} IRS2[01]\d{1,4}"
        r" FAN73\d\d UCC27\d{3} UCC37\d{3} LM510\d 1EDN\d 2EDN\d 2EDL\d L638\d L639\d EG2\d{3} NCP51530 TPS22\d{2,3} AP2280\d"
        r" SY6280 MAX72\d\d TM16\d\d TPIC6\w",
    ),
    (
        "ic",
        "memory",
        {},
        r"(?:AT|M|CAT|BR)?24(?:AA|LC|C|FC)\d{2,4} (?:W|GD|MX|EN)25[A-Z]\d AT25\w M95\d{3} (?:AT)?93[CL]C?\d\d S25F\w"
        r" SST2[56]\w IS(?:25|61|62|42)[A-Z] FM2[45]\w 23(?:K|LC)\d{3,4} 25Q\d\d",
    ),
)

ORDINARY_FAMILIES = POWER + SEMICONDUCTORS + CIRCUITS
